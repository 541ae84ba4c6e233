/* SPDX-License-Identifier: GPL-3.0-or-later */
/* --calibrate: the values of this very board's parts from its measured response. */
#ifndef PW_TWIN_FIT_H
#define PW_TWIN_FIT_H

#include "twin/compare.h"

#define PW_MOST_FITTED 64

typedef enum pw_fitted_kind {
    PW_FITTED_PART, PW_FITTED_F0, PW_FITTED_Q, PW_FITTED_GAIN
} pw_fitted_kind;

/* One parameter: value = nominal * (1 + tolerance * g(u)) for parts, nominal * exp(u / 10) for
 * frequencies, qualities and the gain; u is 0 at nominal. */
typedef struct pw_fitted {
    pw_fitted_kind kind;
    const char *name;            /* "R1", "pole 1 f0", "gain" */
    const char *path; /* of the scalar in the stage file: "analog.circuit.parts.R1.resistor" */
    double tolerance;            /* parts; 0 else */
    double nominal, value;       /* ohm, F, H; Hz; quality; gain as a ratio, signed */
    double error;                /* standard error of value by the data, what is held being right */
    double whole_error;          /* with what the tolerances leave open in the held directions: a
                                    part's own standard deviation (tolerance / sqrt 3 where uniform)
                                    times sqrt(held). NAN for roots held in part: nothing says how
                                    far they may be off */
    bool normal;                 /* the tolerance is that of a normal distribution */
    double held;                 /* 0 .. 1: how much of its direction is held at nominal */
    bool at_bound;               /* the value is at its tolerance's end */
    struct pw_root *root;        /* of the trial stage; roots only */
} pw_fitted;

typedef struct pw_fit {
    pw_fitted parameter[PW_MOST_FITTED];
    int count;
    int found;                   /* combinations of them that the data tell apart */
    double singular[PW_MOST_FITTED];     /* of the sensitivities over the largest, falling */
    double direction[PW_MOST_FITTED][PW_MOST_FITTED];   /* [combination][parameter], unit, in u */
    double correlation_most;     /* largest |correlation| of two parameters' errors; 0: fewer */
    int correlated[2];           /* which two */
    double delay_s;              /* fitted beside them, records only */
    double before_db, after_db;  /* rms error of magnitude before and after */
    double after_most_db;
    double scatter;              /* residual standard deviation over what the data's own errors say
                                    (records), in nepers (responses) */
    int points, iterations;
    bool delay;
} pw_fit;

/* Method: non-linear least squares (GSL's trust region, Levenberg-Marquardt) on log magnitude and
 * phase, weighted by the points' own bands where they have them. g(u) = (2 / pi) atan(pi u / 2)
 * keeps a part inside its tolerance (3 / 2 of it where that is at three sigma of a normal
 * distribution) however far u goes. At nominal, the sensitivities to u have a singular value
 * decomposition; directions whose singular value is below 1e-6 of the largest are held, and so are
 * those whose standard error comes out above 1 in u: the fit moves in the others only. A record's
 * fit has the delay as one more parameter. Standard errors: from the inverse of J'J at the solution
 * times the residual variance. PW_WRONG with a line on standard error where there is nothing to fit
 * or too little data. */
PW_CHECKED pw_status pw_fit_run(const pw_results *results, const pw_points *points, bool delay,
                                pw_arena *arena, pw_fit *out, pw_messages *messages);

/* The analog model of a stage file's text, such as pw_fit_edit gives. */
PW_CHECKED pw_status pw_fit_model(const char *stage_path, const pw_text *text, pw_roots *out);

/* The text of the stage file with the fitted values in it: only the scalars change. */
PW_CHECKED pw_status pw_fit_edit(const char *stage_path, const pw_fit *fit, pw_text *out);

#endif
