/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Averaged spectra of three signals: Welch, "The use of fast Fourier transform for the estimation
 * of power spectra", IEEE Trans. AU-15, 1967. Segments of a power of two, a periodic Hann window,
 * half overlapped, each segment's mean taken away. */
#ifndef PW_TWIN_WELCH_H
#define PW_TWIN_WELCH_H

#include <complex.h>
#include <stddef.h>

#include "base/arena.h"

typedef struct pw_welch {
    int n;                       /* samples of a segment */
    int bins;                    /* n / 2 + 1; bin k is at k rate / n */
    long segments;
    double *xx, *yy, *rr;        /* sums of |X|^2 .. over the segments, no other scale */
    double complex *xy, *ry;     /* sums of conj(X) Y, conj(R) Y */
    /* inner: */
    double *window, *ring[3], *work;
    int filled;
    pw_arena arena;
} pw_welch;

/* n: a power of two, 8 or more. */
void pw_welch_begin(int n, pw_welch *out);
void pw_welch_add(pw_welch *welch, double x, double y, double r);
void pw_welch_end(pw_welch *welch);
/* The sums alone, copied into the arena; nothing can be added to them, and they need no end. */
void pw_welch_keep(const pw_welch *welch, pw_arena *arena, pw_welch *out);

/* The number of independent averages that the half-overlapped segments are worth, for a Hann
 * window: its correlation at half overlap is 1/6 (Welch 1967). */
double pw_welch_averages(const pw_welch *welch);

/* The most power that the window can have carried from other bins, three or more away, to bin k of
 * a spectrum (xx, yy or rr); from the envelope 1 / (pi d (d^2 - 1)) of the Hann window's transform
 * d bins away. */
double pw_welch_leakage(const pw_welch *welch, const double *spectrum, int k);

#endif
