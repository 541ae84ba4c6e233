/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The emitted arithmetic on values of a record, one channel or many, each with its own state. */
#ifndef PW_TWIN_CHANNELS_H
#define PW_TWIN_CHANNELS_H

#include "twin/replay.h"
#include "twin/scale.h"

#define PW_FRAMES 4096           /* at a time */

typedef struct pw_channels {
    const pw_realisation *realisation;
    int count;
    pw_simulation *sim;          /* one each */
    pw_scale in, out;
    uint64_t outside;            /* inputs beyond the word's ends, clamped */
    void *samples;
} pw_channels;

/* Reset, all of them. */
void pw_channels_make(const pw_realisation *realisation, const pw_stage *stage, int count,
                      pw_values values, pw_channels *out);
void pw_channels_free(pw_channels *channels);

/* frames <= PW_FRAMES; in[frame * in_columns + channel] gives out[frame * count + channel]. */
void pw_channels_run(pw_channels *channels, const double *in, int in_columns, double *out,
                     size_t frames);
/* As if the value had been at the input of the channel for ever. */
void pw_channels_settle(pw_channels *channels, int channel, double value);
/* Clips of all channels. */
uint64_t pw_channels_clipped(const pw_channels *channels);

#endif
