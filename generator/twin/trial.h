/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The stage with other values of its parts (or of its roots): what a fit varies, and the
 * response. */
#ifndef PW_TWIN_TRIAL_H
#define PW_TWIN_TRIAL_H

#include "analog/spread_study.h"
#include "twin/fit.h"

typedef struct pw_trial {
    const pw_results *results;
    bool parts;                  /* parts with a tolerance are varied; else roots and gains */
    const double *hz;
    int rows;
    pw_study study;              /* parts */
    pw_bench bench;
    pw_analog_spec spec;         /* roots: a copy that is varied */
    pw_gain **gain;              /* roots: of each parameter, null for those of a root */
    bool *zero;                  /* roots: of each parameter, whether its root is a zero */
    pw_arena *arena;
} pw_trial;

/* Lists the parameters in fit, all at nominal. PW_WRONG with a line on standard error where there
 * is nothing to vary. */
PW_CHECKED pw_status pw_trial_begin(const pw_results *results, const double *hz, int rows,
                                    pw_arena *arena, pw_trial *out, pw_fit *fit,
                                    pw_messages *messages);

/* log|H| (natural) and the phase in radians, continuous from the nominal one for parts, at each
 * row, for u. false: no response there. Sets the parameters' values. */
bool pw_trial_at(pw_trial *trial, pw_fit *fit, const double *u, double *log_size, double *phase);

/* d value / d u of a parameter at u. */
double pw_trial_slope(const pw_fitted *parameter, double u);

void pw_trial_end(pw_trial *trial);

#endif
