/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The arithmetic that generator/words/realisation.h states, written again with 128-bit sums, and
 * exact impulse responses: for tests/outside/test_attack_range.py, which compiles it into a
 * library. It shares no line with the generator or the runtime.
 *
 * A section is 17 numbers: form (0 direct, 1 shaped, 2 coupled), b0 b1 b2, a1 a2, fraction bits of
 * b and of a, k1 k2, sigma omega g, c1 c2 d, fraction bits of c. */
#include <math.h>
#include <stdint.h>
#include <string.h>

enum { FORM, B0, B1, B2, A1, A2, BF, AF, K1, K2, SIGMA, OMEGA, G, C1, C2, D, CF, NUMBERS };

__extension__ typedef __int128 wide;

typedef struct word {
    wide low, high;
    int wraps, truncates;
} word;

static wide down(wide v, int bits) /* v / 2^bits, floor */
{
    wide d = (wide)1 << bits, q = v / d;
    return v % d < 0 ? q - 1 : q;
}

static wide round_down(const word *w, wide acc, int bits)
{
    return down(acc + (w->truncates || bits == 0 ? 0 : (wide)1 << (bits - 1)), bits);
}

static wide stored(const word *w, wide v, int64_t *clips)
{
    if (v >= w->low && v <= w->high) return v;
    ++*clips;
    if (!w->wraps) return v < w->low ? w->low : w->high;
    wide span = w->high - w->low + 1, rest = (v - w->low) % span;
    return w->low + (rest < 0 ? rest + span : rest);
}

static double size(wide v)
{
    return fabs((double)v);
}

/* reach: the largest |node| so far, of y before rounding, then of y, u1, u2 before the clamp (LSB);
 * sum: the largest |accumulator|. */
static wide step(const word *w, const int64_t *s, int64_t q[6], wide x, int64_t clips[3],
                 double reach[4], double *sum)
{
    if (s[FORM] == 2) {
        wide acc[3] = {(wide)s[C1] * q[0] + (wide)s[C2] * q[1] + (wide)s[D] * x,
                       (wide)s[SIGMA] * q[0] - (wide)s[OMEGA] * q[1] + (wide)s[G] * x,
                       (wide)s[OMEGA] * q[0] + (wide)s[SIGMA] * q[1]},
             v[3];
        for (int i = 0; i < 3; i++) {
            v[i] = round_down(w, acc[i], (int)s[i ? AF : CF]);
            reach[1 + i] = fmax(reach[1 + i], size(v[i]));
            *sum = fmax(*sum, size(acc[i]));
            v[i] = stored(w, v[i], &clips[i]);
        }
        q[0] = (int64_t)v[1], q[1] = (int64_t)v[2];
        return v[0];
    }
    int shift = (int)(s[BF] - s[AF]);
    wide p = (wide)s[B0] * x + (wide)s[B1] * q[0] + (wide)s[B2] * q[1];
    *sum = fmax(*sum, size(p));
    p = shift > 0 ? down(p + ((wide)1 << (shift - 1)), shift) : p * ((wide)1 << -shift);
    wide acc =
        p - (wide)s[A1] * q[2] - (wide)s[A2] * q[3] + (wide)s[K1] * q[4] + (wide)s[K2] * q[5];
    wide v = round_down(w, acc, (int)s[AF]);
    *sum = fmax(*sum, size(acc));
    reach[0] = fmax(reach[0], size(acc) * ldexp(1, (int)-s[AF]));
    reach[1] = fmax(reach[1], size(v));
    int64_t before = clips[0];
    wide y = stored(w, v, &clips[0]);
    q[1] = q[0], q[0] = (int64_t)x, q[3] = q[2], q[2] = (int64_t)y, q[5] = q[4];
    q[4] = s[FORM] == 0 || clips[0] > before ? 0 : (int64_t)(acc - v * ((wide)1 << s[AF]));
    return y;
}

void run_sections(int count, const int64_t *sections, int bits, int truncates, int wraps,
                  const int32_t *x, long n, int32_t *y, int64_t (*state)[6], int64_t (*clips)[3],
                  double (*reach)[4], double *sum)
{
    const wide high = ((wide)1 << (bits - 1)) - 1;
    const word w = {-high - 1, high, wraps, truncates};
    for (long i = 0; i < n; i++) {
        wide v = x[i];
        for (int k = 0; k < count; k++)
            v = step(&w, sections + NUMBERS * k, state[k], v, clips[k], reach[k], &sum[k]);
        y[i] = (int32_t)v;
    }
}

/* Response of sections from..last to a unit impulse, at y (0), u1 (1) or u2 (2) of the last. */
void impulse_response(int from, int last, const int64_t *sections, int place, long n, double *h)
{
    long double state[64][4];
    memset(state, 0, sizeof state);
    for (long i = 0; i < n; i++) {
        long double v = i == 0, node = 0;
        for (int k = from; k <= last; k++) {
            const int64_t *s = sections + NUMBERS * k;
            long double *q = state[k], a = ldexpl(1, (int)-s[AF]);
            if (s[FORM] == 2) {
                long double y = ldexpl((long double)s[C1] * q[0] + (long double)s[C2] * q[1] +
                                           (long double)s[D] * v,
                                       (int)-s[CF]);
                long double u1 = a * ((long double)s[SIGMA] * q[0] - (long double)s[OMEGA] * q[1] +
                                      (long double)s[G] * v);
                q[1] = a * ((long double)s[OMEGA] * q[0] + (long double)s[SIGMA] * q[1]), q[0] = u1,
                v = y;
                node = place == 0 ? y : q[place - 1];
            } else {
                long double y = ldexpl((long double)s[B0] * v + (long double)s[B1] * q[0] +
                                           (long double)s[B2] * q[1],
                                       (int)-s[BF]) -
                                a * ((long double)s[A1] * q[2] + (long double)s[A2] * q[3]);
                q[1] = q[0], q[0] = v, q[3] = q[2], q[2] = y, v = node = y;
            }
        }
        h[i] = (double)node;
    }
}
