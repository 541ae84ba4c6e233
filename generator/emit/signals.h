/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Test signals and what the emitted arithmetic makes of them. */
#ifndef PW_EMIT_SIGNALS_H
#define PW_EMIT_SIGNALS_H

#include "report/results.h"

/* A signal and its expected output: words for fixed point, reals for floats; n of each. */
typedef struct pw_vector {
    pw_signal signal;
    long n;
    int32_t *in_words, *out_words;       /* null for floats */
    double *in_reals, *out_reals;        /* null for fixed point */
    double hz;                           /* sine: its frequency; sweep: the first one; square: its
                                            fundamental; 0 for the others */
    double hz_end;                       /* sweep: the last one */
    bool from_state;                     /* silence: starts from the limit cycle's state */
    uint64_t clipped;                    /* times that a node clipped on the way */
} pw_vector;

/* Every signal from rest, but for silence where a limit cycle was found: that starts from its
 * state.
 *   impulse            the peak, then 0
 *   step               the peak from n = 0 on
 *   sine               of the peak, whole periods in the length, nearest to the middle of the band
 *                      (geometric)
 *   sweep              of the peak, frequency rising exponentially over the band
 *   noise              uniform within the peak, by splitmix64 (S. Vigna) from the seed
 *   full-scale-square  between the ends of full scale whatever the peak, at the frequency where the
 *                      response is largest: what clips, clips here
 *   overflow-probe     the worst input within the peak for the fullest node
 *   silence            0
 * Peak: signal.input.peak, of full scale. Float inputs have 23 significant bits at the peak, so
 * that float32 holds them exactly. */
void pw_vector_make(const pw_results *results, pw_signal signal, pw_vector *out);
void pw_vector_free(pw_vector *vector);

/* The largest change of an output sample of these vectors, of full scale, when every multiply-add
 * is contracted (rounded once) that can be; measured by running them so, both ways round where two
 * products meet. 0 for fixed point. */
double pw_contraction_shift(const pw_results *results, const pw_vector *vectors, int n);

/* What a self-test of these vectors accepts, given that shift: four times it, since a compiler may
 * contract some and not others, and one unit in the last place of the largest output. 0 for 0. */
double pw_float_tolerance(const pw_results *results, const pw_vector *vectors, int n, double shift);

#endif
