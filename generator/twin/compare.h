/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A record of the real board against the twin. METHODS.md says how each figure is found. */
#ifndef PW_TWIN_COMPARE_H
#define PW_TWIN_COMPARE_H

#include "twin/flow.h"

#define PW_POINTS 72             /* of the estimated response: log-spaced over the band */
#define PW_EVEN_SHARE 0.95       /* of a record's points must lie inside: 95 % bands let some out */

/* One frequency of a measured response beside the model's. */
typedef struct pw_point {
    double hz;
    double db, deg; /* measured; deg NAN where not known; a record's is without its delay */
    double band_db, band_deg;    /* half the width of the 95 % band; 0 where not known */
    double twin_db, twin_deg;    /* of the realised filter; NAN from half the rate on */
    double analog_db, analog_deg;
    double coherence;            /* of the twin's output and the measured one; NAN for a response */
    double low_db, high_db, low_deg, high_deg;   /* what is allowed; NAN: nothing says */
    bool excited;                /* the record says something about this frequency */
    bool inside;
} pw_point;

typedef enum pw_allowed { PW_ALLOWED_NOTHING, PW_ALLOWED_TOLERANCES, PW_ALLOWED_LIMITS } pw_allowed;

/* Points, and what they say together. */
typedef struct pw_points {
    pw_point *list;
    int count, judged, inside;   /* judged: excited, and something is allowed */
    bool phases;                 /* phases are judged too (a response that has them) */
    int worst; /* index of the largest |db - twin or analog db| among the excited; -1 */
    pw_allowed allowed;
    int64_t draws;
    uint64_t seed;
    bool agrees;                 /* where judged > 0 */
} pw_points;

typedef struct pw_residual { double rms, peak; int64_t peak_at; } pw_residual;   /* volts, frame */

typedef struct pw_reference_figures {
    bool given, linear;
    pw_residual error;           /* twin against the exact analog stage on the held input */
    pw_residual error_aligned;   /* the hold's delay taken out */
    pw_residual board;           /* measured output against the exact stage */
    double hold_delay_samples;   /* 0.5 or 0 */
    double edge_hz, edge_droop_db;       /* the hold's own loss at the upper end of the band */
} pw_reference_figures;

typedef struct pw_comparison {
    int64_t frames, skipped;     /* skipped: at the start, while the twin settles */
    int64_t used;
    bool at_rest;
    pw_flat flat_input, flat_output;
    uint64_t clipped, outside, railed;
    double delay_samples, gain, offset;  /* measured = offset + gain * twin, that much later */
    double output_rms;           /* of the measured output about its mean, volts */
    double lsb;                  /* volts of the output; NAN where neither bits nor words say */
    pw_residual raw, left;       /* before and after delay, gain and offset are taken out */
    double normalised;           /* left.rms / output_rms */
    int segment;                 /* samples; 0: too short for a spectrum */
    double averages;
    pw_points points;
    pw_reference_figures reference;
    struct pw_welch *spectra;    /* in the arena; null where segment is 0 */
    int whole_delay;             /* samples that were taken out before them */
} pw_comparison;

typedef enum pw_hold { PW_HOLD_NONE, PW_HOLD_ZERO, PW_HOLD_LINEAR } pw_hold;

/* Memory from the arena. hold: with the exact analog stage beside it. */
PW_CHECKED pw_status pw_compare_record(pw_flow *flow, pw_hold hold, pw_arena *arena,
                                       pw_comparison *out, pw_messages *messages);

/* The points anew, with like in place of the analog model (see spectrum.h); not judged. */
void pw_compare_again(const pw_results *results, const pw_roots *like, pw_arena *arena,
                      pw_comparison *comparison);

/* A response file: "hz,db[,deg]". */
PW_CHECKED pw_status pw_compare_response(const pw_results *results, const char *path, bool quiet,
                                         pw_arena *arena, pw_points *out, pw_messages *messages);

/* Fills twin and analog of a point of this frequency. */
void pw_point_models(const pw_results *results, pw_point *point);
/* Fills low .. inside of all points, from the tolerances, or from limits where there are none.
 * share: of the judged points that must be inside. */
PW_CHECKED pw_status pw_points_judge(const pw_results *results, bool quiet, double share,
                                     pw_points *points, pw_messages *messages);

#endif
