/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What draws and corners of a spread share. */
#ifndef PW_ANALOG_SPREAD_STUDY_H
#define PW_ANALOG_SPREAD_STUDY_H

#include "analog/sensitivity.h"
#include "analog/spread.h"
#include "analog/spread_model.h"

/* A part with a tolerance. */
typedef struct pw_varied { int circuit, part; double tolerance; bool normal; } pw_varied;

typedef struct pw_study {
    pw_arena arena;
    pw_net *net;                 /* one a circuit of the stage */
    int circuits;
    pw_varied *varied;
    int n;                       /* of them */
    const double *hz;
    int rows;
    double s0;                   /* rad/s, in the middle of the frequencies */
    uint64_t seed;
    double complex *nominal;     /* [circuit * rows + row] */
    double *nominal_slope;       /* [row]: the sum of Re(H'/H) */
} pw_study;

/* A row of one stage beside the nominal one. */
typedef struct pw_change {
    double log_ratio, degrees, delay_s;
} pw_change; /* natural log of |H/H0| */

/* The study of a stage's circuits at these frequencies (above 0, borrowed): every part with a
 * tolerance is varied. seed: of the stage. Ended by pw_study_end. */
void pw_study_begin(const pw_stage *stage, const pw_circuit_list *list, const double *hz, int rows,
                    pw_study *study);
void pw_study_end(pw_study *study);
/* Finds the nominal stage by the same equations; before any pw_bench_at. false: no response. */
bool pw_study_nominal(pw_study *study);

/* What one thread evaluates stages with. */
typedef struct pw_bench {
    const pw_study *study;
    pw_arena arena;
    pw_reduced *model;           /* one a circuit */
    double **scale;              /* [circuit][part] */
} pw_bench;

void pw_bench_make(const pw_study *study, pw_bench *bench);
void pw_bench_free(pw_bench *bench);

/* Sets every varied part to 1 + tolerance * x[i] times its value. false: no response. */
bool pw_bench_set(pw_bench *bench, const double *x);
/* The change at a row. */
pw_change pw_bench_at(pw_bench *bench, int row);
/* Whether the stage has a pole in the right half plane; set it again afterwards. */
bool pw_bench_unstable(pw_bench *bench);

/* x of draw k (see spread.h), -1 .. 1 for uniform parts. points: n numbers of Sobol's sequence for
 * the first 40 parts. */
void pw_study_place(const pw_study *study, int64_t draw, const double *points, double *x);
#define PW_SOBOL_PARTS 40

/* Fills the corner fields of the rows. false: a corner has no response. */
bool pw_study_corners(const pw_study *study, pw_spread_row *row);

#endif
