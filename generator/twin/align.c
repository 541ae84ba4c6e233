/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "twin/align.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include <gsl/gsl_fft_complex.h>
#include <gsl/gsl_sf_bessel.h>

#define SIZE (2 * PW_LAG_MOST)   /* of a transform: a piece and as many zeros */
#define PIECES 64
#define NEAR_PEAK 0.98
#define MIDDLE (PW_ALIGN_TAPS / 2 - 1)

/* ---- Whole samples ---- */

void pw_lag_begin(pw_lag *out)
{
    *out = (pw_lag){0};
    out->r = pw_arena_take(&out->arena, PW_LAG_MOST * sizeof(double));
    out->y = pw_arena_take(&out->arena, PW_LAG_MOST * sizeof(double));
    out->spectrum = pw_arena_take(&out->arena, 2 * SIZE * sizeof(double));
    out->work = pw_arena_take(&out->arena, 2 * SIZE * sizeof(double));
}

/* Adds conj(R) Y of a piece. */
static void add_piece(pw_lag *lag)
{
    double mean[2] = {0, 0}, *z = lag->work;
    for (int i = 0; i < lag->filled; i++)
        mean[0] += lag->r[i] / lag->filled, mean[1] += lag->y[i] / lag->filled;
    memset(z, 0, 2 * SIZE * sizeof *z);
    for (int i = 0; i < lag->filled; i++)
        z[2 * i] = lag->r[i] - mean[0], z[2 * i + 1] = lag->y[i] - mean[1];
    gsl_fft_complex_radix2_forward(z, 1, SIZE);
    for (int k = 0; k < SIZE; k++) {
        int m = (SIZE - k) % SIZE;
        double complex a = CMPLX(z[2 * k], z[2 * k + 1]), b = CMPLX(z[2 * m], -z[2 * m + 1]);
        double complex s = conj((a + b) / 2) * ((a - b) / CMPLX(0, 2));
        lag->spectrum[2 * k] += creal(s);
        lag->spectrum[2 * k + 1] += cimag(s);
    }
    lag->filled = 0;
    lag->pieces++;
}

void pw_lag_add(pw_lag *lag, double r, double y)
{
    if (lag->pieces == PIECES) return;
    lag->r[lag->filled] = r;
    lag->y[lag->filled] = y;
    if (++lag->filled == PW_LAG_MOST) add_piece(lag);
}

static double correlation(const pw_lag *lag, int at)
{
    return lag->spectrum[2 * ((at + SIZE) % SIZE)];
}

int pw_lag_find(pw_lag *lag, bool *inverted)
{
    int best = 0;
    if (lag->filled) add_piece(lag);
    gsl_fft_complex_radix2_inverse(lag->spectrum, 1, SIZE);
    for (int at = -PW_LAG_MOST + 1; at < PW_LAG_MOST; at++)
        if (fabs(correlation(lag, at)) > fabs(correlation(lag, best))) best = at;
    double enough = NEAR_PEAK * fabs(correlation(lag, best));
    for (int at = 0; at < abs(best); at++)
        for (int sign = -1; sign <= 1; sign += 2) {
            double c = fabs(correlation(lag, sign * at));
            if (c >= enough && c >= fabs(correlation(lag, sign * at - 1))
                && c >= fabs(correlation(lag, sign * at + 1)) && abs(best) > at)
                best = sign * at;
        }
    *inverted = correlation(lag, best) < 0;
    return best;
}

void pw_lag_end(pw_lag *lag) { pw_arena_free(&lag->arena); }

/* ---- Parts of a sample ---- */

double pw_align_phase(const pw_welch *w, bool inverted)
{
    double delay = 0;
    for (int round = 0; round < 3; round++) {    /* again where the whole one was one off */
        double above = 0, below = 0;
        for (int k = 1; k < w->bins - 1; k++) {
            double power = w->rr[k] * w->yy[k], omega = 2 * M_PI * k / w->n;
            if (!(power > 0)) continue;
            double coherence = fmin(1, creal(w->ry[k] * conj(w->ry[k])) / power);
            double weight = cabs(w->ry[k]) * fmin(1e4, coherence / (1 - coherence + 1e-12));
            double complex rest = (inverted ? -1 : 1) * w->ry[k] * cexp(CMPLX(0, omega * delay));
            above -= weight * omega * carg(rest);
            below += weight * omega * omega;
        }
        if (!(below > 0)) return 0;
        delay += above / below;
    }
    return fabs(delay) < 2 ? delay : 0;
}

static void make_taps(double part, double *tap)
{
    const double beta = 10, middle = MIDDLE + part;
    double sum = 0;
    for (int i = 0; i < PW_ALIGN_TAPS; i++) {
        double t = i - middle, x = 2 * t / PW_ALIGN_TAPS;
        double window =
            fabs(x) >= 1 ? 0 : gsl_sf_bessel_I0(beta * sqrt(1 - x * x)) / gsl_sf_bessel_I0(beta);
        tap[i] = window * (fabs(t) < 1e-12 ? 1 : sin(M_PI * t) / (M_PI * t));
        sum += tap[i];
    }
    for (int i = 0; i < PW_ALIGN_TAPS; i++) tap[i] /= sum;
}

/* The taps delay by 31 + part samples; y waits for those 31, and for the whole samples below 0. */
void pw_aligned_begin(double delay, pw_aligned *out)
{
    int whole = (int)floor(delay);
    *out = (pw_aligned){.whole_r = whole > 0 ? whole : 0,
                        .whole_y = (whole < 0 ? -whole : 0) + MIDDLE,
                        .plain = delay == whole};
    make_taps(delay - whole, out->tap);
    out->room = out->whole_r + out->whole_y + PW_ALIGN_TAPS + 1;
    out->r = pw_arena_take(&out->arena, (size_t)out->room * sizeof(double));
    out->y = pw_arena_take(&out->arena, (size_t)out->room * sizeof(double));
}

bool pw_aligned_add(pw_aligned *a, double r, double y, double *late, double *y_out)
{
    int k = (a->at - a->whole_r + a->room) % a->room;
    a->r[a->at] = r;
    a->y[a->at] = y;
    *late = 0;
    if (a->plain) *late = a->r[(k - MIDDLE + a->room) % a->room];
    for (int i = 0; i < PW_ALIGN_TAPS && !a->plain; i++, k = k ? k - 1 : a->room - 1)
        *late += a->tap[i] * a->r[k];
    *y_out = a->y[(a->at - a->whole_y + a->room) % a->room];
    a->at = (a->at + 1) % a->room;
    return ++a->seen >= a->room;
}

void pw_aligned_end(pw_aligned *a) { pw_arena_free(&a->arena); }
