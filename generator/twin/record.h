/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Measured records and responses, read in pieces: CSV text and WAV sound files.
 *
 * CSV: lines that begin with # are comments; the first other line names the columns, divided by
 * commas, semicolons or tabs; each further line has one number for each name, with a decimal
 * point. WAV: 16-, 24- or 32-bit PCM, 32- or 64-bit float; a value of 1.0 is full scale. */
#ifndef PW_TWIN_RECORD_H
#define PW_TWIN_RECORD_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include "base/arena.h"
#include "base/status.h"

#define PW_MAX_COLUMNS 256
#define PW_RECORD_LINE (1 << 16) /* bytes of the longest line of text */

typedef enum pw_record_kind {
    PW_RECORD_INPUTS, /* every column whose name begins with "input" (WAV: every channel) */
    PW_RECORD_PAIR, /* "input", "output" (WAV: two channels in this order) */
    PW_RECORD_RESPONSE /* "hz", "db" and, where it is there, "deg"; no WAV */
} pw_record_kind;

typedef struct pw_record {
    const char *path;            /* as messages name it; borrowed */
    pw_record_kind kind;
    double rate_hz;              /* what a time column must agree with; 0: no such check */
    bool wav;
    int columns;                 /* that are delivered */
    const char *name[PW_MAX_COLUMNS];
    int64_t frames;              /* read so far */
    double size, done;           /* bytes (CSV) or frames (WAV), in all and so far */
    struct pw_csv *csv;
    void *sound;                 /* SNDFILE * */
    pw_arena arena;
} pw_record;

/* PW_WRONG with a line on standard error, FILE[:LINE]: what is wrong; what was expected. */
PW_CHECKED pw_status pw_record_open(const char *path, pw_record_kind kind, double rate_hz,
                                    pw_record *out);

/* Up to most frames into values[frame * columns + column]; *got 0 at the end. */
PW_CHECKED pw_status pw_record_read(pw_record *record, double *values, size_t most, size_t *got);

void pw_record_close(pw_record *record);

/* "PATH: text" or "PATH:LINE: text" on standard error; PW_WRONG. */
PW_CHECKED pw_status pw_record_wrong(const char *path, int64_t line, const char *format, ...)
    PW_PRINTF(3, 4);

/* The decimal number at *at (blanks before it allowed), exact as strtod in the C locale; *at moves
 * behind it, or stays where there is none. */
double pw_decimal(const char **at);

/* What the two forms have to offer. */
PW_CHECKED pw_status pw_csv_open(pw_record *record);
PW_CHECKED pw_status pw_csv_read(pw_record *record, double *values, size_t most, size_t *got);
void pw_csv_close(pw_record *record);
PW_CHECKED pw_status pw_wav_open(pw_record *record);
PW_CHECKED pw_status pw_wav_read(pw_record *record, double *values, size_t most, size_t *got);
void pw_wav_close(pw_record *record);

#endif
