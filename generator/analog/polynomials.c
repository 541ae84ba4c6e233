/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analog/wide.h"
#include "analog/polynomial.h"
#include "analog/rootlist.h"

/* Where trouble stands and what the polynomial is called. */
typedef struct pw_side { const char *name; const double *c; int count; pw_where at; } pw_side;

static bool check(const pw_side *side, pw_messages *messages)
{
    int first = 0;
    while (first < side->count && side->c[first] == 0)
        first++;
    if (side->count == 0 || first == side->count)
        pw_error(messages, side->at,
                 "the %s is 0; expected a coefficient other than 0", side->name);
    else if (first > 0)
        pw_error(messages, side->at,
                 "the %s begins with 0; expected the highest power of s that is "
                 "there first: leave out the leading %s", side->name, first == 1 ? "0" : "zeros");
    else if (side->count - 1 > PW_MAX_ROOTS)
        pw_error(messages, side->at, "the %s is of degree %d; expected at most %d", side->name,
                 side->count - 1, PW_MAX_ROOTS);
    else
        return true;
    return false;
}

/* Roots at exactly 0: how many of the last coefficients are 0. */
static int at_origin(const pw_side *side)
{
    int n = 0;
    while (side->c[side->count - 1 - n] == 0)
        n++;
    return n;
}

/* The roots of one side into list: those at 0 (but for `shared` of them), then the others. */
static pw_status solve(const pw_side *side, int shared, double complex *list, int *count,
                       pw_messages *messages)
{
    int origin = at_origin(side), degree = side->count - 1 - origin;
    *count = 0;
    for (int i = shared; i < origin; i++)
        list[(*count)++] = 0;
    pw_status status = pw_polynomial_roots(side->c, degree, list + *count);
    if (status == PW_FAILED)
        pw_error(messages, side->at,
                 "the roots of the %s did not converge; expected the roots themselves, "
                 "under roots:", side->name);
    else if (status == PW_WRONG)
        pw_error(messages, side->at,
                 "the %s has a root too large or too small for a number; expected "
                 "coefficients of a physical size", side->name);
    *count += degree;
    return status;
}

/* One message is enough: it is one polynomial that is wrong. */
static pw_status check_poles(const pw_roots *out, pw_where at, pw_messages *messages)
{
    for (int i = 0; i < out->poles; i++)
        if (cimag(out->pole[i]) >= 0 && !pw_roots_check_pole(out->pole[i], at, messages))
            return PW_WRONG;
    return PW_OK;
}

pw_status pw_analog_from_polynomials(const pw_analog_spec *spec, pw_roots *out,
                                     pw_messages *messages)
{
    const pw_side top = {"numerator", spec->numerator, spec->numerators, spec->numerator_at};
    const pw_side bottom = {"denominator", spec->denominator, spec->denominators,
                            spec->denominator_at};
    bool good = check(&top, messages);
    good = check(&bottom, messages) && good;
    if (!good)
        return PW_WRONG;
    int shared = at_origin(&top) < at_origin(&bottom) ? at_origin(&top) : at_origin(&bottom);
    *out = (pw_roots){.factor = (long double)top.c[0] / bottom.c[0]};
    pw_status zeros = solve(&top, shared, out->zero, &out->zeros, messages);
    pw_status poles = solve(&bottom, shared, out->pole, &out->poles, messages);
    if (zeros != PW_OK || poles != PW_OK)
        return zeros > poles ? zeros : poles;
    return check_poles(out, spec->denominator_at, messages);
}
