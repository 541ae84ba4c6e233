/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How far the parts' tolerances move a stage: an envelope of magnitude, phase and delay. */
#ifndef PW_ANALOG_SPREAD_H
#define PW_ANALOG_SPREAD_H

#include <stdint.h>

#include "analog/model.h"
#include "base/text.h"

#define PW_SPREAD_ROWS 121       /* of pw_spread_compute: log-spaced over the band */

/* One quantity at one frequency. */
typedef struct pw_range { double nominal, low, high, corner_low, corner_high; } pw_range;

/* Phases are continuous from the nominal one, degrees; delays are group delays, seconds. */
typedef struct pw_spread_row { double hz; pw_range db, deg, delay_s; } pw_spread_row;

typedef struct pw_draws { int64_t from, to; } pw_draws;        /* draws from .. to-1 */

typedef struct pw_spread {
    char sha256[65];             /* of the stage file */
    uint64_t seed;
    int64_t draws;               /* of the whole study */
    int64_t drawn;               /* of it here: all but for a shard */
    int64_t unstable;            /* drawn stages with a pole in the right half plane */
    pw_draws *done;              /* what was drawn, in order, apart from each other */
    int dones;
    int parts;                   /* that have a tolerance */
    double floor_db;             /* worst figures are taken within it of the largest magnitude */
    pw_spread_row *row;
    int rows;
    double worst_db, worst_db_hz;      /* largest distance of draws or corners from the nominal */
    double worst_deg, worst_deg_hz;
} pw_spread;

typedef struct pw_spread_options {
    int threads; /* 0: as many as there are processors. The result never depends on it */
    int shard, shards;           /* draw share shard, 1 .. shards; 0, 0: all */
    bool quiet;                  /* no progress on a terminal */
} pw_spread_options;             /* {0} is usual */

/* The spread of a stage over its band (or at n given frequencies in Hz, above 0). *out is null,
 * with PW_OK, where no part has a tolerance. stage->spread says draws and seed. PW_FAILED with a
 * message where a corner or draw has no response.
 *
 * Method: draw k is point k of Sobol's sequence (Bratley and Fox 1988, GSL's), shifted modulo 1 by
 * numbers from the seed (Cranley and Patterson 1976), for the first 40 parts with a tolerance;
 * further ones take a counter-based hash of seed, draw and part. Uniform parts span value (1 -
 * tolerance .. 1 + tolerance); normal ones have the tolerance at three sigma and go beyond it
 * in 0.27 % of draws. Corners: every part at the end of its tolerance that the sign of its
 * sensitivity at that frequency asks for; where the response is not monotonic in a part, draws
 * may go beyond a corner. Accuracy: each response to 1e-9 of the largest magnitude in the band;
 * magnitudes are clipped at -400 dB. */
PW_CHECKED pw_status pw_spread_compute(const pw_stage *stage, const pw_roots *analog,
                                       const pw_spread_options *options, struct pw_spread **out,
                                       pw_messages *messages);
PW_CHECKED pw_status pw_spread_compute_at(const pw_stage *stage, const pw_roots *analog,
                                          const double *hz, int n, const pw_spread_options *options,
                                          struct pw_spread **out, pw_messages *messages);
void pw_spread_free(struct pw_spread *spread);           /* null is allowed */

/* The share that an error of the replacement is of the stage's own spread: error / worst spread,
 * both in dB (or both in degrees). INFINITY where nothing spreads. */
double pw_spread_share_db(const struct pw_spread *spread, double error_db);
double pw_spread_share_deg(const struct pw_spread *spread, double error_deg);

/* The lowest and highest of draws and corners together at hz, interpolated between rows on a
 * logarithmic scale; the end rows beyond them. */
void pw_spread_envelope(const struct pw_spread *spread, double hz, double db[2], double deg[2],
                        double delay_s[2]);

/* Whether any part of the stage has a tolerance. */
bool pw_spread_applies(const pw_stage *stage);

/* ---- Shards ---- */

/* A shard as a text file, exact: pw_spread_read gives the same struct. */
void pw_spread_write(const struct pw_spread *spread, pw_text *out);

/* PW_WRONG with a message on standard error where the text of the file called name is no shard. */
PW_CHECKED pw_status pw_spread_read(const char *name, const pw_text *text, struct pw_spread **out);

/* Adds another shard of the same study. PW_WRONG with a line on standard error where the two are of
 * different studies (stage file, seed, draws, frequencies) or share draws. */
PW_CHECKED pw_status pw_spread_merge(struct pw_spread *into, const struct pw_spread *more,
                                     const char *name);

/* Whether frequencies, nominal magnitudes and their corners agree: what no draw decides, but every
 * part's value and tolerance does (a --set changes them and not the stage file). */
bool pw_spread_same_stage(const struct pw_spread *left, const struct pw_spread *right);

/* The worst figures anew, from the rows. */
void pw_spread_finish(struct pw_spread *spread);

#endif
