/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How the roots and gains of a circuit follow its parts. */
#ifndef PW_ANALOG_SENSITIVITY_H
#define PW_ANALOG_SENSITIVITY_H

#include "analog/circuit.h"
#include "base/text.h"

/* The circuits of a stage: its circuit, its cell expanded, or those of its cascade, in order. */
typedef struct pw_circuit_list { pw_circuit *circuit; int count; } pw_circuit_list;

/* Memory from the arena. PW_WRONG with messages where a cell cannot be expanded. */
PW_CHECKED pw_status pw_circuits_of(const pw_analog_spec *spec, pw_arena *arena,
                                    pw_circuit_list *out, pw_messages *messages);

/* Roots that move as one: a real root, a pair, or a cluster of real ones (equal to 1e-4). */
typedef struct pw_mode {
    bool zero;                   /* of the numerator */
    int count;                   /* roots */
    double complex root;         /* rad/s; of a pair the upper one; of a cluster the mean */
    double f0_hz;                /* geometric mean of |s| / 2 pi */
    double q;                    /* of two roots: |s| / |s1 + s2|, INFINITY on the axis; else NAN */
    double tau_s;                /* 1 / |mean real part|; INFINITY on the axis */
} pw_mode;

typedef enum pw_gain_place {
    PW_GAIN_DC,
    PW_GAIN_MIDDLE,
    PW_GAIN_INFINITY,
    PW_GAIN_PLACES
} pw_gain_place;

typedef struct pw_moves { double f0, q; } pw_moves;   /* percent per percent; NAN: not defined */

typedef struct pw_sensitivity {
    const pw_circuit *circuit;
    int modes;
    pw_mode mode[2 * PW_MAX_ROOTS];              /* poles first; roots at 0 are left out */
    double middle_hz; /* where the gain is largest; 0: at DC. With poles at
                                                    0: the middle of the modes */
    double gain[PW_GAIN_PLACES];                 /* signed at DC and infinity, |H| in the middle;
                                                    INFINITY with poles at 0 */
    int parts;
    int *part;                                   /* indices into circuit->part */
    pw_moves *move;                              /* [part * modes + mode] */
    double (*gain_db)[PW_GAIN_PLACES];           /* [part]: dB per percent; NAN where the gain is 0
                                                    or infinite */
} pw_sensitivity;

/* Method: derivatives at each root and gain (sensitivity_adjoint.h); where roots stand together and
 * have none, the circuit is solved again with each part 1e-8 larger, in quadruple precision, roots
 * are matched by nearness, and k equal ones (which part by the k-th root of 1e-8) are judged by
 * their product and sum. Accuracy: 1e-6 of a percent per percent.
 * PW_FAILED where the circuit cannot be solved (pw_analog_from_circuit tells why). */
PW_CHECKED pw_status pw_sensitivity_compute(const pw_circuit *circuit, pw_arena *arena,
                                            pw_sensitivity *out);

/* For `show`: of each circuit of the stage the gains, the table of sensitivities, and, where the
 * stage file says "nearest: E24", the nearest values of that series and what they would do.
 * Nothing for a stage without circuits. */
void pw_circuit_show(const pw_stage *stage, pw_text *out);

/* ---- IEC 60063 ---- */

/* The value of the series (E3, E6, E12, E24, E48, E96, E192) that is nearest on a logarithmic
 * scale. value > 0. The value itself where there is no such series. */
double pw_series_nearest(const char *series, double value);

#endif
