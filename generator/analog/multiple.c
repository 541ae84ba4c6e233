/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Which roots of a polynomial are one.
 *
 * Method: rounding the coefficients to doubles turns a root of multiplicity m into a cloud of m
 * roots. Every cluster of roots, the largest first, is tried as one multiple root: the whole
 * polynomial is fitted with that structure, and the structure stands where every coefficient is met
 * within its own rounding. So a cloud becomes one root, and roots that the coefficients can tell
 * apart stay apart. The same test puts pairs on the imaginary axis.
 * Source: Zeng, "Computing multiple roots of inexact polynomials", Math. Comp. 74 (2005): the
 * fit and its backward error. The search by clusters is our own. */
#include "analog/wide.h"
#include "analog/polynomial.h"

#include <string.h>

#define UNIT 1.1102230246251565e-16F128      /* 2^-53, half a unit in the last place of 1 */
#define TOLERANCE (8 * UNIT)
#define PLAUSIBLE (1000 * UNIT)

typedef struct pw_search {
    const pw_wide *c;
    const pw_wide_complex *z;
    int n;
    bool merged[PW_MAX_ROOTS];
    pw_factor found[PW_MAX_ROOTS];
    int founds;
} pw_search;

static pw_factor factor_of(pw_wide_complex z, int multiplicity)
{
    pw_wide re = crealf128(z), im = cimagf128(z);
    if (im == 0)
        return (pw_factor){.multiplicity = multiplicity, .c = -re};
    return (pw_factor){.pair = true, .multiplicity = multiplicity, .b = -2 * re,
                       .c = re * re + im * im};
}

pw_wide_complex pw_factor_root(const pw_factor *f)
{
    if (!f->pair)
        return -f->c;
    return PW_WIDE_COMPLEX(f->axis ? 0 : -f->b / 2, sqrtf128(f->c - f->b * f->b / 4));
}

/* The conjugate of root i: a pair stands together. */
static int mirror(const pw_wide_complex *z, int i)
{
    pw_wide im = cimagf128(z[i]);
    return im == 0 ? i : im > 0 ? i + 1 : i - 1;
}

static bool holds(const int *set, int size, int i)
{
    for (int k = 0; k < size; k++)
        if (set[k] == i)
            return true;
    return false;
}

/* Whether p at c is as small as the coefficients' rounding could make it. */
static bool plausible(const pw_search *search, pw_wide_complex c)
{
    pw_wide product = 1, modulus = cabsf128(c);
    for (int j = 0; j < search->n; j++)
        product *= cabsf128(c - search->z[j]) / (modulus + cabsf128(search->z[j]));
    return product <= PLAUSIBLE;
}

/* The factors found so far, then every root that is in none of them and not in the set. */
static int gather(const pw_search *search, const int *set, int size, pw_factor *factor)
{
    int count = search->founds;
    memcpy(factor, search->found, sizeof *factor * (size_t)count);
    for (int i = 0; i < search->n; i++)
        if (!search->merged[i] && cimagf128(search->z[i]) >= 0 && !holds(set, size, i)
            && !holds(set, size, mirror(search->z, i)))
            factor[count++] = factor_of(search->z[i], 1);
    return count;
}

static int degree(const pw_factor *factor, int factors)
{
    int sum = 0;
    for (int k = 0; k < factors; k++)
        sum += factor[k].multiplicity * (factor[k].pair ? 2 : 1);
    return sum;
}

/* Tries the set as one root of its multiplicity (and its mirror image as another). */
static bool merge(pw_search *search, const int *set, int size)
{
    pw_factor factor[PW_MAX_ROOTS];
    pw_wide_complex sum = 0;
    bool own_mirror = holds(set, size, mirror(search->z, set[0]));
    for (int k = 0; k < size; k++)
        sum += search->z[set[k]];
    pw_wide_complex centre = own_mirror ? crealf128(sum) / size : sum / size;
    if (!plausible(search, centre))
        return false;
    int count = gather(search, set, size, factor);
    factor[count++] = factor_of(centre, size);
    if (degree(factor, count) != search->n)      /* ties that rounding cut unevenly */
        return false;
    if (!pw_factors_fit(search->c, search->n, factor, count, TOLERANCE))
        return false;
    memcpy(search->found, factor, sizeof *factor * (size_t)search->founds);
    search->found[search->founds++] = factor[count - 1];
    for (int k = 0; k < size; k++)
        search->merged[set[k]] = search->merged[mirror(search->z, set[k])] = true;
    return true;
}

static pw_wide distance(const pw_wide_complex *z, int i, int j)
{
    return cabsf128(z[i] - z[j]) / fmaxf128(cabsf128(z[i]), cabsf128(z[j]));
}

/* The minimum spanning tree of a set (Prim): up[k] is the parent of set[k], reach[k] the length of
 * that edge. Returns the longest edge. */
static pw_wide span(const pw_wide_complex *z, const int *set, int size, int *up, pw_wide *reach)
{
    bool in[PW_MAX_ROOTS] = {true};
    pw_wide longest = 0;
    for (int k = 1; k < size; k++) {
        up[k] = 0;
        reach[k] = distance(z, set[0], set[k]);
    }
    for (int step = 1; step < size; step++) {
        int next = 0;
        for (int k = 1; k < size; k++)
            if (!in[k] && (next == 0 || reach[k] < reach[next]))
                next = k;
        in[next] = true;
        longest = fmaxf128(longest, reach[next]);
        for (int k = 1; k < size; k++)
            if (!in[k] && distance(z, set[next], set[k]) < reach[k]) {
                up[k] = next;
                reach[k] = distance(z, set[next], set[k]);
            }
    }
    return longest;
}

/* The name of the part in which k lies once the longest edges are cut: its top. */
static int top(const int *up, const pw_wide *reach, pw_wide cut, int k)
{
    while (k != 0 && reach[k] < cut)
        k = up[k];
    return k;
}

/* Tries a set as one root; where it is not, its parts. Of two mirror images the upper is tried. */
static void visit(pw_search *search, const int *set, int size)
{
    int up[PW_MAX_ROOTS], part[PW_MAX_ROOTS];
    pw_wide reach[PW_MAX_ROOTS];
    bool own_mirror = holds(set, size, mirror(search->z, set[0]));
    if (size < 2 || (!own_mirror && cimagf128(search->z[set[0]]) < 0) || merge(search, set, size))
        return;
    /* edges that mirror each other are equal but for rounding, and are cut together */
    pw_wide cut = span(search->z, set, size, up, reach) * (1 - 1e-20F128);
    for (int head = 0; head < size; head++) {
        int count = 0;
        for (int k = 0; k < size; k++)
            if (top(up, reach, cut, k) == head)
                part[count++] = set[k];
        if (count > 0)
            visit(search, part, count);
    }
}

/* Holds each pair that is as good as on the imaginary axis exactly there, where that fits. */
static void hold_on_axis(const pw_search *search, pw_factor *factor, int factors)
{
    pw_factor tried[PW_MAX_ROOTS];
    for (int k = 0; k < factors; k++) {
        pw_factor *f = &factor[k];
        if (!f->pair || fabsf128(f->b) > 1e-6F128 * sqrtf128(f->c))
            continue;
        memcpy(tried, factor, sizeof *tried * (size_t)factors);
        tried[k].axis = true;
        tried[k].b = 0;
        if (pw_factors_fit(search->c, search->n, tried, factors, TOLERANCE))
            memcpy(factor, tried, sizeof *tried * (size_t)factors);
    }
}

int pw_factors_find(const pw_wide *c, int n, const pw_wide_complex *root, pw_factor *out)
{
    pw_search search = {.c = c, .z = root, .n = n};
    int all[PW_MAX_ROOTS];
    for (int i = 0; i < n; i++)
        all[i] = i;
    visit(&search, all, n);
    int factors = gather(&search, NULL, 0, out);
    if (search.founds > 0 && !pw_factors_fit(c, n, out, factors, TOLERANCE))
        factors = gather(&search, NULL, 0, out);
    hold_on_axis(&search, out, factors);
    return factors;
}

/* Ascending modulus, then real part; both of equal roots stand together. */
static bool before(const pw_factor *a, const pw_factor *b)
{
    pw_wide_complex p = pw_factor_root(a), q = pw_factor_root(b);
    pw_wide difference = cabsf128(p) - cabsf128(q);
    return difference != 0 ? difference < 0 : crealf128(p) < crealf128(q);
}

bool pw_polynomial_roots(const double *c, int n, double complex *root)
{
    pw_wide wide[PW_MAX_ROOTS + 1];
    pw_wide_complex z[PW_MAX_ROOTS];
    pw_factor factor[PW_MAX_ROOTS];
    int at = 0;
    for (int i = 0; i <= n; i++)
        wide[i] = c[i];
    if (n == 0)
        return true;
    if (!pw_wide_roots(wide, n, z))
        return false;
    int factors = pw_factors_find(wide, n, z, factor);
    for (int i = 1; i < factors; i++)
        for (int k = i; k > 0 && before(&factor[k], &factor[k - 1]); k--) {
            pw_factor held = factor[k];
            factor[k] = factor[k - 1];
            factor[k - 1] = held;
        }
    for (int k = 0; k < factors; k++) {
        pw_wide_complex r = pw_factor_root(&factor[k]);
        double re = (double)crealf128(r), im = (double)cimagf128(r);
        for (int m = 0; m < factor[k].multiplicity; m++) {
            root[at++] = CMPLX(re, im);
            if (factor[k].pair)
                root[at++] = CMPLX(re, -im);
        }
    }
    return true;
}
