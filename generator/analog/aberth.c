/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analog/wide.h"
#include "analog/polynomial.h"

#define ROUNDS 2000

/* log|c| for the power i, or -infinity where that power is missing. */
static double height(const pw_wide *c, int n, int i)
{
    return c[n - i] == 0 ? -INFINITY : (double)logf128(fabsf128(c[n - i]));
}

/* Corners of the upper convex hull of (power, height): Bini's Newton polygon. */
static int polygon(const pw_wide *c, int n, int *corner)
{
    int corners = 0;
    for (int i = 0; i <= n; i++) {
        double here = height(c, n, i);
        if (here == -INFINITY)
            continue;
        while (corners >= 2) {
            int a = corner[corners - 2], b = corner[corners - 1];
            double low = height(c, n, a);
            if ((height(c, n, b) - low) * (i - a) > (here - low) * (b - a))
                break;
            corners--;
        }
        corner[corners++] = i;
    }
    return corners;
}

/* Starting points: on each edge of the polygon as many as it is long, on a circle of the radius
 * that its slope gives, turned so that no two circles line up with the real axis. */
static void start(const pw_wide *c, int n, pw_wide_complex *z)
{
    int corner[PW_MAX_ROOTS + 1], corners = polygon(c, n, corner), at = 0;
    for (int e = 1; e < corners; e++) {
        int low = corner[e - 1], many = corner[e] - low;
        pw_wide radius = expf128((logf128(fabsf128(c[n - low]))
                                  - logf128(fabsf128(c[n - corner[e]]))) / many);
        for (int k = 0; k < many; k++) {
            double turn = 2 * M_PI * k / many + 2 * M_PI * e / n + 0.7;
            z[at++] = radius * PW_WIDE_COMPLEX(cos(turn), sin(turn));
        }
    }
}

/* One Ehrlich-Aberth step of root i; false where it has arrived: p there is below its own rounding
 * error, or the step below that of z. */
static bool step(const pw_wide *c, int n, pw_wide_complex *z, int i)
{
    pw_wide_complex p = c[0], slope = 0, push = 0;
    pw_wide size = fabsf128(c[0]), modulus = cabsf128(z[i]);
    for (int k = 1; k <= n; k++) {
        slope = slope * z[i] + p;
        p = p * z[i] + c[k];
        size = size * modulus + fabsf128(c[k]);
    }
    if (cabsf128(p) <= 2 * n * PW_WIDE_EPSILON * size)
        return false;
    for (int j = 0; j < n; j++)
        if (j != i && z[j] != z[i])
            push += 1 / (z[i] - z[j]);
    pw_wide_complex move = 1 / (slope / p - push);
    if (!isfinite(crealf128(move)) || !isfinite(cimagf128(move)))
        move = z[i] * PW_WIDE_COMPLEX(1e-3, 1e-3);      /* a stationary point: step off it */
    z[i] -= move;
    return cabsf128(move) > PW_WIDE_EPSILON * modulus;
}

/* The partner of root i among those from i + 1 on: the one nearest to its conjugate, or i itself
 * where that is nearer, which says that the root is real. */
static int partner(const pw_wide_complex *z, int n, int i)
{
    int best = i;
    pw_wide least = 2 * fabsf128(cimagf128(z[i]));
    for (int j = i + 1; j < n; j++) {
        pw_wide off = cabsf128(z[j] - conjf128(z[i]));
        if (off < least) {
            least = off;
            best = j;
        }
    }
    return best;
}

static void swap(pw_wide_complex *z, int i, int j)
{
    pw_wide_complex held = z[i];
    z[i] = z[j];
    z[j] = held;
}

/* Makes conjugates exact and real roots real, the most complex first: what is left over when every
 * pair has found its partner lies on the axis but for rounding. */
static void symmetrise(pw_wide_complex *z, int n)
{
    for (int i = 0; i < n; ) {
        int most = i;
        for (int j = i; j < n; j++)
            if (fabsf128(cimagf128(z[j])) * cabsf128(z[most])
                > fabsf128(cimagf128(z[most])) * cabsf128(z[j]))
                most = j;
        swap(z, i, most);
        int mate = partner(z, n, i);
        if (mate == i) {
            z[i] = crealf128(z[i]);
            i++;
            continue;
        }
        swap(z, i + 1, mate);
        pw_wide re = (crealf128(z[i]) + crealf128(z[i + 1])) / 2;
        pw_wide im = fabsf128(cimagf128(z[i]) - cimagf128(z[i + 1])) / 2;
        z[i] = PW_WIDE_COMPLEX(re, im);
        z[i + 1] = PW_WIDE_COMPLEX(re, -im);
        i += 2;
    }
}

bool pw_wide_roots(const pw_wide *c, int n, pw_wide_complex *root)
{
    bool moving[PW_MAX_ROOTS];
    int left = n;
    for (int i = 0; i < n; i++)
        moving[i] = true;
    start(c, n, root);
    for (int round = 0; round < ROUNDS && left > 0; round++)
        for (int i = 0; i < n; i++)
            if (moving[i] && !step(c, n, root, i)) {
                moving[i] = false;
                left--;
            }
    symmetrise(root, n);
    return left == 0;
}
