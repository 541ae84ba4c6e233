/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The stage as the user described it: everything the stage file can say, in SI units, with
 * defaults filled in. Made by stagefile/, read by every station. Values whose meaning only a later
 * station can judge carry the place where they stand, so that the station can complain there. */
#ifndef PW_STAGEFILE_STAGE_H
#define PW_STAGEFILE_STAGE_H

#include <complex.h>
#include <stdbool.h>
#include <stdint.h>
#include "base/arena.h"
#include "base/messages.h"

#define PW_MAX_ROOTS 64          /* poles, and zeros, of a whole stage */

/* A number that may be given or not. value is in SI units (Hz stay Hz). */
typedef struct pw_given { double value; bool given; pw_where at; } pw_given;

/* ---- analog ---- */

typedef struct pw_root {
    double complex s;            /* rad/s; imag > 0: stands for itself and its conjugate;
                                    imag == 0 and not double_real: one real root */
    bool double_real;            /* a {frequency, q} pair with q <= 0.5 is two real ones: s, s2 */
    double s2;                   /* rad/s, the other one */
    pw_where at;
} pw_root;

typedef enum pw_gain_kind { PW_GAIN_FACTOR, PW_GAIN_AT } pw_gain_kind;

typedef struct pw_gain {
    pw_gain_kind kind;
    double factor;               /* PW_GAIN_FACTOR: K of K prod(s-z)/prod(s-p) */
    double at_hz, is;            /* PW_GAIN_AT: at 0 Hz H(0) itself; elsewhere |H|, sign of K */
    bool invert;                 /* flips the sign at the end */
    pw_where at;
} pw_gain;

typedef enum pw_approximation {
    PW_BUTTERWORTH, PW_CHEBYSHEV, PW_INVERSE_CHEBYSHEV, PW_ELLIPTIC, PW_BESSEL,
    PW_CRITICALLY_DAMPED, PW_LINKWITZ_RILEY
} pw_approximation;
typedef enum pw_shape { PW_LOWPASS, PW_HIGHPASS, PW_BANDPASS, PW_BANDSTOP } pw_shape;
typedef enum pw_normalise {
    PW_NORMALISE_MAGNITUDE, PW_NORMALISE_PHASE, PW_NORMALISE_DELAY
} pw_normalise;

typedef struct pw_family {
    pw_approximation approximation;
    pw_shape shape;
    int order;                   /* of the low-pass prototype, 1 to 20 */
    double corner_hz[2];         /* [1] for band shapes only; [0] < [1] */
    pw_given ripple_db, stopband_db, corner_at_db;   /* positive dB */
    pw_normalise normalise;
    pw_where at;                 /* of the family map */
    pw_where order_at, corner_at[2];
} pw_family;

typedef enum pw_part_kind {
    PW_RESISTOR, PW_CAPACITOR, PW_INDUCTOR, PW_OP_AMP, PW_AMPLIFIER, PW_TRANSCONDUCTOR, PW_COUPLING
} pw_part_kind;

typedef struct pw_part {
    const char *name;
    pw_part_kind kind;
    double value;                /* ohm, F, H, V/V, S; coupling: k, -1 < k < 1 */
    const char *node[4];         /* between: [0] [1]; op-amp: plus minus out; sense [0] [1],
                                    drive [2] [3]; coupling: names of two inductors */
    pw_where node_at[4];
    bool ideal;                  /* op-amp: a nullor */
    double gain_bandwidth_hz, dc_gain, output_resistance;   /* op-amp not ideal; 0 ohm allowed */
    double tolerance;            /* as a fraction, 0.01 for 1 %; 0: exact */
    bool normal;                 /* tolerance at 3 sigma of a normal distribution; else uniform */
    pw_where at, value_at;       /* of the part, of its value */
} pw_part;

typedef struct pw_circuit {
    bool current_input;          /* else a voltage source */
    const char *input;           /* node, against ground */
    double source_resistance;    /* ohm; 0 ideal voltage; current: INFINITY ideal */
    const char *output[2];       /* [1] null: against ground */
    pw_given load;               /* ohm */
    pw_part *part;
    int parts;
    const char *series;          /* "E24", ...; null: not given */
    pw_where at, input_at, output_at[2];
} pw_circuit;

typedef struct pw_cell_value { const char *name; double value; double tolerance; bool normal;
                               pw_where at; } pw_cell_value;
typedef struct pw_cell {
    const char *kind;
    pw_cell_value *value;        /* R1, C1, .. in SI units, and plain numbers such as stages */
    int values;
    pw_where at, kind_at;
} pw_cell;

typedef enum pw_analog_kind {
    PW_ANALOG_ROOTS, PW_ANALOG_POLYNOMIALS, PW_ANALOG_FAMILY, PW_ANALOG_CIRCUIT, PW_ANALOG_CELL,
    PW_ANALOG_CASCADE
} pw_analog_kind;

typedef struct pw_analog_spec {
    pw_analog_kind kind;
    pw_where at;
    pw_root *zero, *pole;        /* roots */
    int zeros, poles;
    pw_gain gain;                /* roots */
    double *numerator, *denominator;   /* polynomials, highest power of s first */
    int numerators, denominators;
    pw_where numerator_at, denominator_at;
    pw_family family;
    pw_circuit circuit;
    pw_cell cell;
    struct pw_analog_spec *member;     /* cascade */
    int members;
} pw_analog_spec;

/* ---- the rest ---- */

typedef enum pw_method {
    PW_BILINEAR, PW_MATCHED_Z, PW_IMPULSE_INVARIANT, PW_STEP_INVARIANT, PW_BEST
} pw_method;
typedef enum pw_prewarp {
    PW_PREWARP_DEFAULT, PW_PREWARP_NONE, PW_PREWARP_AT, PW_PREWARP_EACH_SECTION
} pw_prewarp;
typedef enum pw_infinity {
    PW_INFINITY_NYQUIST, PW_INFINITY_KEEP_ONE, PW_INFINITY_KEEP
} pw_infinity;

typedef struct pw_transform {
    pw_method method;
    pw_prewarp prewarp;
    double prewarp_hz;           /* PW_PREWARP_AT */
    pw_given match_gain_hz;
    pw_infinity zeros_at_infinity;
    pw_where at, method_at, prewarp_at;
} pw_transform;

typedef enum pw_sample { PW_FLOAT32, PW_FLOAT64, PW_Q31, PW_Q15 } pw_sample;
typedef enum pw_structure {
    PW_STRUCTURE_AUTO, PW_DIRECT_1, PW_DIRECT_1_SHAPED, PW_TRANSPOSED_2, PW_COUPLED
} pw_structure;
typedef enum pw_scaling {
    PW_SCALING_L1, PW_SCALING_LINF, PW_SCALING_L2, PW_SCALING_NONE
} pw_scaling;

typedef struct pw_arithmetic {
    pw_sample sample;
    int coefficient_bits;        /* 16 or 32; default 16 for q15, 32 for q31; 0 for floats */
    pw_structure structure;
    pw_scaling scaling;
    bool truncate, wrap, as_listed, standalone;
    pw_where at, structure_at, coefficient_at;
} pw_arithmetic;

/* One side of the signal. Volts. Full scale is max(high - zero, zero - low). */
typedef struct pw_port {
    bool given;
    double low, high, zero;
    int bits;                    /* 0: not given */
    double peak;                 /* about zero; input only; full scale where not given */
    bool has_rails;
    double rail[2];              /* output only */
    double full_scale;           /* volts; 1 where no signal is given */
    pw_where at;
} pw_port;

typedef struct pw_limits {
    double band_hz[2];           /* default rate/10000 .. 0.4 rate */
    bool band_given;
    pw_given magnitude_db, phase_deg, delay_s, noise_db, cycles, flash_bytes, ram_bytes;
    bool overflow_forbidden;
    double floor_db;             /* 60 */
    pw_where at, band_at[2], overflow_at;
} pw_limits;

typedef enum pw_signal {
    PW_SIGNAL_IMPULSE, PW_SIGNAL_STEP, PW_SIGNAL_SINE, PW_SIGNAL_SWEEP, PW_SIGNAL_NOISE,
    PW_SIGNAL_FULL_SCALE_SQUARE, PW_SIGNAL_OVERFLOW_PROBE, PW_SIGNAL_SILENCE, PW_SIGNALS
} pw_signal;

typedef struct pw_vectors_spec {
    bool want[PW_SIGNALS];       /* default: all */
    int length;                  /* 1 to 1,000,000; default 2048 */
    uint64_t seed;               /* default 1 */
} pw_vectors_spec;

typedef struct pw_spread_spec { int draws; uint64_t seed; } pw_spread_spec;   /* 2000, 1 */

typedef struct pw_stage {
    const char *name, *about;    /* about: "" where not given */
    double rate_hz;
    pw_analog_spec analog;
    pw_transform transform;
    pw_arithmetic arithmetic;
    pw_port input, output;
    pw_limits limits;
    const char *target;          /* "host" where not given */
    bool target_given;
    pw_where target_at, rate_at, name_at;
    pw_vectors_spec vectors;
    pw_spread_spec spread;       /* tolerance draws */
    const char *const *taken;    /* the defaults that were taken, "transform.method: best", in the
                                    order of the table of keys, ended by a null; the report lists
                                    them. Null: none */
    char sha256[65];             /* of the bytes of the stage file */
    const char *file;            /* as messages name it */
    pw_arena arena;              /* owns every pointer above */
} pw_stage;

void pw_stage_free(pw_stage *stage);

/* Words of the enumerations as the stage file spells them ("matched-z", "q15", "direct-1"). */
const char *pw_method_word(pw_method method);
const char *pw_sample_word(pw_sample sample);
const char *pw_structure_word(pw_structure structure);
const char *pw_scaling_word(pw_scaling scaling);
const char *pw_signal_word(pw_signal signal);
const char *pw_approximation_word(pw_approximation approximation);
const char *pw_shape_word(pw_shape shape);

#endif
