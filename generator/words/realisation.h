/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Sections -> the arithmetic that the C performs: words, scales, bounds, noise.
 *
 * THE ARITHMETIC, which runtime/, emit/ and simulate/ each carry out bit for bit alike.
 * Samples x, y are float, double, int16_t (q15: 1.0 is 32768) or int32_t (q31: 1.0 is 2^31).
 *
 * transposed-2 (floats; every operation rounded on its own, no fused multiply-add):
 *     y  = s1 + b0 * x
 *     s1 = (s2 + b1 * x) - a1 * y
 *     s2 = b2 * x - a2 * y                      (order 1: s1 = b1 * x - a1 * y)
 *     Words are the ideal coefficients rounded to the format.
 *
 * direct-1 (fixed point, and the same formula in floats where the user asks for it; 64-bit
 * accumulator; words are integers, b_k = word 2^-b_fraction, a_k = word 2^-a_fraction):
 *     p   = b0 x + b1 x1 + b2 x2                exact
 *     p   = p 2^(a_fraction - b_fraction)       left shift exact; a right shift by s rounds half
 *                                               up: (p + 2^(s-1)) >> s, arithmetic shift (floor)
 *     acc = p - a1 y1 - a2 y2                   exact
 *     v   = (acc + half) >> a_fraction          half = 2^(a_fraction-1) nearest, 0 truncate
 *     y   = v clamped to the word (saturate) or reduced modulo 2^16 / 2^32 (wrap); if v was outside
 *           the word, clipped is counted up by one
 *     x2 = x1; x1 = x; y2 = y1; y1 = y
 * direct-1-shaped: as direct-1 with
 *     acc = p - a1 y1 - a2 y2 + k1 e1 + k2 e2   k1, k2 small integers
 *     e   = acc - (v << a_fraction)             before any clamp: half of one step at most for
 *                                               nearest, 0 <= e < 1 step for truncate
 *     if v was outside the word: e = 0
 *     e2 = e1; e1 = e
 * coupled (fixed point; u1, u2 are samples; order 2 with a complex pair only):
 *     y    = clamp((c1 u1 + c2 u2 + d x + half) >> c_fraction)          from the old u1, u2
 *     new1 = clamp((sigma u1 - omega u2 + g x + half) >> a_fraction)
 *     new2 = clamp((omega u1 + sigma u2 + half) >> a_fraction)
 *     H = d + g (c1 (z - sigma) + c2 omega) / ((z - sigma)^2 + omega^2)
 *     each clamp counts its own clips.
 *
 * No accumulator ever leaves int64_t for any input and any reachable or unreachable state word:
 * words are chosen so that the sum of |word| times the largest sample, each shift included, stays
 * below 2^63. That is a precondition of every kernel. */
#ifndef PW_WORDS_REALISATION_H
#define PW_WORDS_REALISATION_H

#include "discrete/digital.h"
#include "target/target.h"

typedef struct pw_words {        /* one section, as computed */
    pw_structure structure;      /* never PW_STRUCTURE_AUTO */
    int order;                   /* 0 plain gain (direct-1 with a = 0), 1 or 2 */
    /* floats: */
    double fb[3], fa[3];         /* the words as doubles (rounded to float for float32); fa[0] =
                                    1 */
    /* direct forms, fixed point: */
    int32_t b[3], a[3];          /* a[0] unused; within int16_t for 16-bit words */
    int b_fraction, a_fraction;  /* 0..62 and 0..31; b_fraction may exceed 31 for small words */
    int32_t k1, k2;              /* shaped: error feedback */
    /* coupled: */
    int32_t sigma, omega, g, c1, c2, d;
    int c_fraction;              /* a_fraction is that of sigma, omega, g */
    /* what was proved: */
    bool cannot_clip;            /* every clamp of this section may be left out, for any input word
                                    (not only within the peak) */
    bool fits_32;                /* the accumulator may be kept modulo 2^32: its final value always
                                    fits int32_t (needs b_fraction == a_fraction, 16-bit words) */
    double realised_b[3], realised_a[3];   /* exactly what the words compute, sample to sample
                                              (coupled: rounded to double) */
} pw_words;

typedef struct pw_node {
    char name[40];               /* "section 2 output", "section 2 accumulator", "section 3 u1" */
    int section;                 /* from 1 */
    double bound;                /* of |node|, full scale 1.0; INFINITY for an integrator. From a
                                    state that reset or settle made; behind a section that can
                                    clip, and in the accumulator of one, for an input of full scale
                                    there */
    double headroom_db;          /* 20 log10(largest positive word / bound); -INFINITY */
    double peak_gain;            /* L1 from input to node, without round-off */
    bool can_clip, integrates;
    double samples_to_clip;      /* integrators, for the worst input at peak; NAN otherwise */
    double samples_to_clip_code; /* integrators, for input_code of offset; NAN otherwise */
} pw_node;

#define PW_MAX_NODES (5 * PW_MAX_SECTIONS)

typedef struct pw_noise {
    bool given;                  /* false for floats */
    double output_rms_lsb, output_offset_lsb, output_dbfs, snr_db, effective_bits;
    double input_quantisation_rms_lsb;    /* what the input's own rounding becomes at the output */
    double growth_lsb2_per_sample;        /* integrators: variance per sample, INFINITY where that
                                             grows itself; else 0. The rms above is then of the
                                             rest */
    bool grows;
} pw_noise;

typedef struct pw_limit_cycle {
    bool given;                  /* false for floats */
    double bound_lsb;            /* proved: no zero-input cycle at the output is larger; INFINITY
                                    after an integrator */
    double found_lsb;            /* largest amplitude that the search met without input */
    double found_constant_lsb;   /* largest half swing that it met under a small constant input */
    int found_period;            /* samples; 0 none found, 1 a constant */
    bool has_state;              /* worst state found, for the silence vector: */
    int64_t state[PW_MAX_SECTIONS][6];    /* direct: x1 x2 y1 y2 e1 e2; coupled: u1 u2 0 0 0 0 */
} pw_limit_cycle;

typedef struct pw_realisation {
    pw_sample sample;
    int coefficient_bits;        /* 16 or 32; 0 for floats */
    bool truncate, wrap;
    pw_scaling scaling;
    int count;
    pw_words section[PW_MAX_SECTIONS];
    pw_section ideal[PW_MAX_SECTIONS];    /* the ideal section behind each one, in output per input
                                             units; product = digital model */
    pw_node node[PW_MAX_NODES];
    int nodes;
    double input_peak;           /* of full scale, <= 1: the bound assumes |x| <= this */
    double input_full_scale, output_full_scale;   /* in user units */
    double input_code;           /* of full scale: one code of the input's converter where its bits
                                    are given, at least one LSB; else one LSB; 0 for floats */
    double first_clip_input;     /* input level (of full scale) at which the first node can clip;
                                    INFINITY: none can at any level up to full scale; 0 with an
                                    integrator, and where rounding alone could fill a node */
    pw_noise noise;
    pw_limit_cycle limit_cycle;
    int worst_node;              /* index of the node nearest to its clamp */
    const char *structure_why;   /* one sentence; "" where the user named it */
    int enough_bits;             /* coefficient word length that keeps word_magnitude_db within
                                    limits.magnitude (0.5 dB where not given): coefficient_bits
                                    where it does, else the shortest that would; 0: none up to 32 */
    const char *order_why;       /* how the order was found */
    pw_error_peak word_magnitude_db, word_phase_deg;   /* realised against ideal over the band */
} pw_realisation;

/* Words, scales, order and every proof. Messages: a structure that does not fit the format or the
 * poles, words too short for stability (with the length that would do). */
PW_CHECKED pw_status pw_realise(const pw_stage *stage, const pw_roots *analog,
                                const pw_digital *digital, const pw_target *target,
                                pw_realisation *out, pw_messages *messages);

/* Realised response from input sample to output sample at z. */
double complex pw_realised_at(const pw_realisation *realisation, double complex z);

/* The input (of length n, in words for fixed point, of full scale for floats) that drives the node
 * nearest to its clamp to within 1 % of its bound at its last sample: signs of the reversed impulse
 * response at the peak. Where n is too short it takes the last n signs. */
void pw_overflow_probe(const pw_realisation *realisation, int n, double *input);

#endif
