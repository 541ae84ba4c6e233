/* SPDX-License-Identifier: GPL-3.0-or-later */
/* --play: a record through the emitted arithmetic into another one. */
#ifndef PW_TWIN_PLAY_H
#define PW_TWIN_PLAY_H

#include "base/text.h"
#include "report/results.h"

typedef struct pw_play {
    const char *in, *out;        /* paths; out ends in .wav for a WAV file, else it is CSV */
    bool samples, quiet;
    /* what was done: */
    int channels;
    int64_t frames;
    uint64_t clipped, outside;   /* nodes that clipped; inputs beyond full scale */
} pw_play;

/* Starts from reset, as the emitted C does. CSV: the columns input.. are written again, each with
 * its output.. beside it, in the same values (volts, or samples); from WAV to CSV and back 1.0 is
 * full scale. WAV: the outputs in the filter's own format (16- or 32-bit PCM, 32- or 64-bit float).
 * PW_WRONG and PW_FAILED with a line on standard error; nothing is then written. */
PW_CHECKED pw_status pw_play_run(const pw_results *results, pw_play *play);

void pw_play_say(const pw_results *results, const pw_play *play, bool json, pw_text *out);

#endif
