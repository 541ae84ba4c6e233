/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Which roots of a polynomial are one.
 *
 * Method: rounding the coefficients to doubles turns a root of multiplicity m into a cloud of m
 * roots. Clusters of roots where the polynomial is as small as that rounding could make it are
 * taken for one multiple root each, the largest first, and the whole polynomial is fitted with that
 * structure. It stands where every coefficient is met within its own rounding; otherwise the
 * cluster whose division helps most is divided. So a cloud becomes one root, and roots that the
 * coefficients can tell apart stay apart. The same test puts pairs on the imaginary axis.
 * Accuracy: a multiple root comes back to about 1e-15 times the condition of its structure; two
 * roots nearer than about 1e-7 of their modulus count as one.
 * Source: Zeng, "Computing multiple roots of inexact polynomials", Math. Comp. 74 (2005): the
 * fit and its backward error. The search by clusters is our own. */
#include "analog/wide.h"
#include "analog/polynomial.h"

#include <string.h>

#define UNIT 1.1102230246251565e-16F128      /* 2^-53, half a unit in the last place of 1 */
#define TOLERANCE (8 * UNIT)
#define PLAUSIBLE (1000 * UNIT)

/* Roots with the same label count as one; a label is the index of a member, and the label of the
 * mirror image of a cluster is the mirror image of its label. */
typedef struct pw_search {
    const pw_wide *c;
    const pw_wide_complex *z;
    int n, label[PW_MAX_ROOTS];
} pw_search;

typedef struct pw_set { int at[PW_MAX_ROOTS], size; } pw_set;

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

static bool holds(const pw_set *set, int i)
{
    for (int k = 0; k < set->size; k++)
        if (set->at[k] == i)
            return true;
    return false;
}

static bool own_mirror(const pw_search *search, const pw_set *set)
{
    return holds(set, mirror(search->z, set->at[0]));
}

/* Where the roots of a set would meet: on the real axis where it is its own mirror image. */
static pw_wide_complex centre(const pw_search *search, const pw_set *set)
{
    pw_wide_complex sum = 0;
    for (int k = 0; k < set->size; k++)
        sum += search->z[set->at[k]];
    return own_mirror(search, set) ? crealf128(sum) / set->size : sum / set->size;
}

/* Whether p at the centre is as small as the coefficients' rounding could make it. */
static bool plausible(const pw_search *search, const pw_set *set)
{
    pw_wide_complex c = centre(search, set);
    pw_wide product = 1, modulus = cabsf128(c);
    for (int j = 0; j < search->n; j++)
        product *= cabsf128(c - search->z[j]) / (modulus + cabsf128(search->z[j]));
    return product <= PLAUSIBLE;
}

static pw_wide distance(const pw_wide_complex *z, int i, int j)
{
    return cabsf128(z[i] - z[j]) / fmaxf128(cabsf128(z[i]), cabsf128(z[j]));
}

/* The minimum spanning tree of a set (Prim): up[k] is the parent of member k, reach[k] the length
 * of that edge. Returns the longest edge. */
static pw_wide span(const pw_wide_complex *z, const pw_set *set, int *up, pw_wide *reach)
{
    bool in[PW_MAX_ROOTS] = {true};
    pw_wide longest = 0;
    for (int k = 1; k < set->size; k++) {
        up[k] = 0;
        reach[k] = distance(z, set->at[0], set->at[k]);
    }
    for (int step = 1; step < set->size; step++) {
        int next = 0;
        for (int k = 1; k < set->size; k++)
            if (!in[k] && (next == 0 || reach[k] < reach[next]))
                next = k;
        in[next] = true;
        longest = fmaxf128(longest, reach[next]);
        for (int k = 1; k < set->size; k++) {
            pw_wide across = distance(z, set->at[next], set->at[k]);
            if (!in[k] && across < reach[k]) {
                up[k] = next;
                reach[k] = across;
            }
        }
    }
    return longest;
}

/* The member at the top of the part in which k lies once the longest edges are cut. */
static int top(const int *up, const pw_wide *reach, pw_wide cut, int k)
{
    while (k != 0 && reach[k] < cut)
        k = up[k];
    return k;
}

static void settle(pw_search *search, const pw_set *set);

/* Divides a set where it is widest, and settles its parts. */
static void divide(pw_search *search, const pw_set *set)
{
    int up[PW_MAX_ROOTS];
    pw_wide reach[PW_MAX_ROOTS];
    /* edges that mirror each other are equal but for rounding, and are cut together */
    pw_wide cut = span(search->z, set, up, reach) * (1 - 1e-20F128);
    for (int head = 0; head < set->size; head++) {
        pw_set part = {.size = 0};
        for (int k = 0; k < set->size; k++)
            if (top(up, reach, cut, k) == head)
                part.at[part.size++] = set->at[k];
        if (part.size > 0)
            settle(search, &part);
    }
}

/* Labels a set, and its mirror image, as one root where that is plausible; else its parts. Of two
 * mirror images the upper one sees to both. */
static void settle(pw_search *search, const pw_set *set)
{
    const pw_wide_complex *z = search->z;
    bool own = own_mirror(search, set);
    if (!own && cimagf128(z[set->at[0]]) < 0)
        return;
    if (set->size > 1 && !plausible(search, set)) {
        divide(search, set);
        return;
    }
    for (int k = 0; k < set->size; k++) {
        search->label[set->at[k]] = set->at[0];
        if (!own)
            search->label[mirror(z, set->at[k])] = mirror(z, set->at[0]);
    }
}

static pw_set cluster(const pw_search *search, int label)
{
    pw_set set = {.size = 0};
    for (int i = 0; i < search->n; i++)
        if (search->label[i] == label)
            set.at[set.size++] = i;
    return set;
}

/* The factors that the labels say; how many, or -1 where ties that rounding cut unevenly left
 * something that is no polynomial of the degree. */
static int gather(const pw_search *search, pw_factor *factor)
{
    int count = 0, degree = 0;
    for (int i = 0; i < search->n; i++) {
        if (search->label[i] != i)
            continue;
        pw_set set = cluster(search, i);
        if (!own_mirror(search, &set) && cimagf128(search->z[i]) < 0)
            continue;
        factor[count] = factor_of(centre(search, &set), set.size);
        degree += factor[count].multiplicity * (factor[count].pair ? 2 : 1);
        count++;
    }
    return degree == search->n ? count : -1;
}

static pw_wide try(const pw_search *search, pw_factor *factor, int *factors)
{
    *factors = gather(search, factor);
    return *factors < 0 ? INFINITY : pw_factors_fit(search->c, search->n, factor, *factors);
}

/* Divides the cluster whose division leaves the least residual; false where there is none. */
static bool divide_one(pw_search *search)
{
    pw_search best = *search;
    pw_wide least = INFINITY;
    bool any = false;
    for (int i = 0; i < search->n; i++) {
        pw_factor factor[PW_MAX_ROOTS];
        int factors;
        pw_set set = cluster(search, i);
        if (set.size < 2 || (!own_mirror(search, &set) && cimagf128(search->z[i]) < 0))
            continue;
        pw_search trial = *search;
        divide(&trial, &set);
        pw_wide residual = try(&trial, factor, &factors);
        if (!any || residual < least) {
            least = residual;
            best = trial;
        }
        any = true;
    }
    *search = best;
    return any;
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
        if (pw_factors_fit(search->c, search->n, tried, factors) <= TOLERANCE)
            memcpy(factor, tried, sizeof *tried * (size_t)factors);
    }
}

int pw_factors_find(const pw_wide *c, int n, const pw_wide_complex *root, pw_factor *out)
{
    pw_search search = {.c = c, .z = root, .n = n};
    pw_set all = {.size = n};
    int factors = 0;
    for (int i = 0; i < n; i++)
        all.at[i] = i;
    settle(&search, &all);
    while (!(try(&search, out, &factors) <= TOLERANCE))
        if (!divide_one(&search))
            break;
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

static void sort(pw_factor *factor, int factors)
{
    for (int i = 1; i < factors; i++)
        for (int k = i; k > 0 && before(&factor[k], &factor[k - 1]); k--) {
            pw_factor held = factor[k];
            factor[k] = factor[k - 1];
            factor[k - 1] = held;
        }
}

pw_status pw_polynomial_roots(const double *c, int n, double complex *root)
{
    pw_wide wide[PW_MAX_ROOTS + 1];
    pw_wide_complex z[PW_MAX_ROOTS];
    pw_factor factor[PW_MAX_ROOTS];
    int at = 0;
    for (int i = 0; i <= n; i++)
        wide[i] = c[i];
    if (n == 0)
        return PW_OK;
    if (!pw_wide_roots(wide, n, z))
        return PW_FAILED;
    int factors = pw_factors_find(wide, n, z, factor);
    sort(factor, factors);
    for (int k = 0; k < factors; k++) {
        pw_wide_complex r = pw_factor_root(&factor[k]);
        double re = (double)crealf128(r), im = (double)cimagf128(r);
        if (!isnormal(hypot(re, im)) || (factor[k].pair && im == 0))
            return PW_WRONG;
        for (int m = 0; m < factor[k].multiplicity; m++) {
            root[at++] = CMPLX(re, im);
            if (factor[k].pair)
                root[at++] = CMPLX(re, -im);
        }
    }
    return PW_OK;
}
