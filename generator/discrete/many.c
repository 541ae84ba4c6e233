/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Zeros of a polynomial in many digits.
 * Method: the simultaneous iteration of Ehrlich and Aberth, each zero by Newton's step corrected
 * for the others, from first guesses on the circles that the Newton polygon of log|coefficient|
 * gives, so that zeros of any spread of sizes are met at once.
 * Source: O. Aberth, Mathematics of Computation 27 (1973), 339-344; D. A. Bini, Numerical
 * Algorithms 13 (1996), 179-200, for the guesses. */
#include "discrete/many.h"

#include <math.h>
#include <stdlib.h>

#include "base/arena.h"

#define MOST_ROUNDS 400
#define AT_REST (-80)            /* log2 of a relative step */

void pw_many_make(pw_many *list, int count, long bits)
{
    list->at = pw_take((size_t)count * sizeof *list->at);
    list->count = count;
    list->bits = bits;
    for (int i = 0; i < count; i++) {
        mpc_init2(list->at[i], bits);
        mpc_set_ui(list->at[i], 0, MPC_RNDNN);
    }
}

void pw_many_free(pw_many *list)
{
    for (int i = 0; i < list->count; i++) mpc_clear(list->at[i]);
    free(list->at);
    *list = (pw_many){0};
}

static double part_log2(mpfr_srcptr x)
{
    long exponent;
    if (mpfr_zero_p(x)) return -INFINITY;
    double fraction = mpfr_get_d_2exp(&exponent, x, MPFR_RNDN);
    return log2(fabs(fraction)) + (double)exponent;
}

/* To within half a bit: the larger part decides. */
static double rough_log2(mpc_srcptr x)
{
    return fmax(part_log2(mpc_realref(x)), part_log2(mpc_imagref(x)));
}

double pw_many_log(mpc_srcptr x)
{
    double re = part_log2(mpc_realref(x)), im = part_log2(mpc_imagref(x)), top = fmax(re, im);
    if (top == -INFINITY) return top;
    return (top + log2(hypot(exp2(re - top), exp2(im - top)))) * M_LN2;
}

/* x = exp(log_size) e^(j angle), at any exponent. */
static void set_polar(mpc_ptr x, double log_size, double angle)
{
    double whole = floor(log_size / M_LN2), size = exp(log_size - whole * M_LN2);
    mpc_set_d_d(x, size * cos(angle), size * sin(angle), MPC_RNDNN);
    mpc_mul_2si(x, x, (long)whole, MPC_RNDNN);
}

/* The next corner of the upper hull of (k, level[k]) after `from`. */
static int next_corner(const double *level, int n, int from)
{
    int best = n;
    double steepest = -INFINITY;
    for (int k = from + 1; k <= n; k++) {
        double slope = (level[k] - level[from]) / (k - from);
        if (slope >= steepest) {
            steepest = slope;
            best = k;
        }
    }
    return best;
}

static void first_guesses(const pw_many *coefficient, pw_many *root)
{
    int n = coefficient->count - 1, placed = 0;
    double *level = pw_take((size_t)(n + 1) * sizeof *level);
    for (int k = 0; k <= n; k++) level[k] = fmax(pw_many_log(coefficient->at[k]), -1e15);
    for (int from = 0; from < n;) {
        int to = next_corner(level, n, from);
        double log_size = (level[to] - level[from]) / (to - from);
        for (int i = 0; i < to - from; i++) {
            double angle = 2 * M_PI * i / (to - from) + 0.7 + from;
            set_polar(root->at[placed++], log_size, angle);
        }
        from = to;
    }
    free(level);
}

typedef struct work { mpc_t value, slope, sum, step; } work;

static void work_make(work *w, long bits)
{
    mpc_init2(w->value, bits);
    mpc_init2(w->slope, bits);
    mpc_init2(w->sum, bits);
    mpc_init2(w->step, bits);
}

static void work_free(work *w)
{
    mpc_clear(w->value);
    mpc_clear(w->slope);
    mpc_clear(w->sum);
    mpc_clear(w->step);
}

static void horner(const pw_many *coefficient, mpc_srcptr x, work *w)
{
    mpc_set(w->value, coefficient->at[0], MPC_RNDNN);
    mpc_set_ui(w->slope, 0, MPC_RNDNN);
    for (int k = 1; k < coefficient->count; k++) {
        mpc_mul(w->slope, w->slope, x, MPC_RNDNN);
        mpc_add(w->slope, w->slope, w->value, MPC_RNDNN);
        mpc_mul(w->value, w->value, x, MPC_RNDNN);
        mpc_add(w->value, w->value, coefficient->at[k], MPC_RNDNN);
    }
}

/* One step of root i; true where it is at rest. Two guesses that fell together are pulled apart. */
static bool improve(const pw_many *coefficient, pw_many *root, int i, work *w)
{
    mpc_ptr x = root->at[i];
    horner(coefficient, x, w);
    if (mpc_cmp_si(w->value, 0) == 0) return true;
    mpc_set_ui(w->sum, 0, MPC_RNDNN);
    for (int k = 0; k < root->count; k++) {
        if (k == i) continue;
        mpc_sub(w->step, x, root->at[k], MPC_RNDNN);
        if (mpc_cmp_si(w->step, 0) == 0) continue;
        mpc_ui_div(w->step, 1, w->step, MPC_RNDNN);
        mpc_add(w->sum, w->sum, w->step, MPC_RNDNN);
    }
    mpc_mul(w->sum, w->sum, w->value, MPC_RNDNN);            /* p'/p - sum, times p */
    mpc_sub(w->sum, w->slope, w->sum, MPC_RNDNN);
    if (mpc_cmp_si(w->sum, 0) == 0) {
        mpc_mul_ui(w->step, x, 3, MPC_RNDNN);
        mpc_div_2ui(x, w->step, 2, MPC_RNDNN);
        return false;
    }
    mpc_div(w->step, w->value, w->sum, MPC_RNDNN);
    mpc_sub(x, x, w->step, MPC_RNDNN);
    return rough_log2(w->step) <= rough_log2(x) + AT_REST;
}

bool pw_many_zeros(const pw_many *coefficient, pw_many *root, bool warm)
{
    int n = root->count, moving = n;
    bool *rest = pw_take((size_t)n * sizeof *rest);
    work w;
    if (!warm) first_guesses(coefficient, root);
    work_make(&w, coefficient->bits);
    for (int round = 0; round < MOST_ROUNDS && moving; round++)
        for (int i = 0; i < n; i++)
            if (!rest[i] && improve(coefficient, root, i, &w)) {
                rest[i] = true;
                moving--;
            }
    work_free(&w);
    free(rest);
    return moving == 0;
}
