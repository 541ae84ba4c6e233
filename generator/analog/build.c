/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analog/rootlist.h"

#include <math.h>

#define MAX_INTEGRATORS 2

static pw_status check_poles(const pw_roots *part, pw_where at, pw_messages *messages)
{
    for (int i = 0; i < part->poles; i++)
        if (cimag(part->pole[i]) >= 0 && !pw_roots_check_pole(part->pole[i], at, messages))
            return PW_WRONG;
    return PW_OK;
}

static pw_status collect(const pw_analog_spec *spec, pw_roots *out, pw_messages *messages);

/* Every member is read, so that every mistake is told. */
static pw_status collect_cascade(const pw_analog_spec *spec, pw_roots *out, pw_messages *messages)
{
    pw_status status = PW_OK;
    *out = (pw_roots){.factor = 1};
    for (int i = 0; i < spec->members; i++) {
        pw_roots part;
        pw_status one = collect(&spec->member[i], &part, messages);
        if (one == PW_OK && !pw_roots_append(out, &part, spec->member[i].at, messages))
            return PW_WRONG;
        if (one > status)
            status = one;
    }
    return status;
}

/* Zeros, poles and factor of one description, its poles checked; it may still be improper. */
static pw_status collect(const pw_analog_spec *spec, pw_roots *out, pw_messages *messages)
{
    pw_status status = PW_FAILED;
    switch (spec->kind) {
    case PW_ANALOG_ROOTS:
        return pw_analog_from_roots(spec, out, messages);
    case PW_ANALOG_POLYNOMIALS:
        return pw_analog_from_polynomials(spec, out, messages);
    case PW_ANALOG_FAMILY:
        return pw_analog_from_family(&spec->family, out, messages);
    case PW_ANALOG_CASCADE:
        return collect_cascade(spec, out, messages);
    case PW_ANALOG_CIRCUIT:
        status = pw_analog_from_circuit(&spec->circuit, out, messages);
        break;
    case PW_ANALOG_CELL:
        status = pw_analog_from_cell(&spec->cell, out, messages);
        break;
    }
    return status == PW_OK ? check_poles(out, spec->at, messages) : status;
}

/* Where the first zero too many stands, as far as the description says. */
static pw_where zero_place(const pw_analog_spec *spec)
{
    if (spec->kind == PW_ANALOG_POLYNOMIALS)
        return spec->numerator_at;
    return spec->kind == PW_ANALOG_ROOTS ? spec->zero[spec->zeros - 1].at : spec->at;
}

/* Where the last pole at 0 stands. */
static pw_where integrator_place(const pw_analog_spec *spec)
{
    pw_where at = spec->kind == PW_ANALOG_POLYNOMIALS ? spec->denominator_at : spec->at;
    for (int i = 0; spec->kind == PW_ANALOG_ROOTS && i < spec->poles; i++)
        if (spec->pole[i].s == 0)
            at = spec->pole[i].at;
    return at;
}

static bool finite_roots(const pw_roots *roots)
{
    double sum = 0;
    for (int i = 0; i < roots->poles; i++)
        sum += fabs(creal(roots->pole[i])) + fabs(cimag(roots->pole[i]));
    for (int i = 0; i < roots->zeros; i++)
        sum += fabs(creal(roots->zero[i])) + fabs(cimag(roots->zero[i]));
    return isfinite(sum);
}

static bool check_proper(const pw_analog_spec *spec, const pw_roots *roots, pw_messages *messages)
{
    int more = roots->zeros - roots->poles;
    if (more <= 0)
        return true;
    pw_error(messages, zero_place(spec),
             "%d zero%s and %d pole%s: the gain would grow without end with frequency; expected at "
             "least as many poles as zeros: add %s above the frequencies that matter",
             roots->zeros, roots->zeros == 1 ? "" : "s", roots->poles, roots->poles == 1 ? "" : "s",
             more == 1 ? "a pole" : "poles");
    return false;
}

static bool check_integrators(const pw_analog_spec *spec, const pw_roots *roots,
                              pw_messages *messages)
{
    int integrators = pw_analog_integrators(roots);
    if (integrators <= MAX_INTEGRATORS)
        return true;
    pw_error(messages, integrator_place(spec), "%d poles at 0; expected at most %d", integrators,
             MAX_INTEGRATORS);
    return false;
}

static bool check_range(const pw_analog_spec *spec, const pw_roots *roots, pw_messages *messages)
{
    if (isfinite(roots->factor) && roots->factor != 0 && finite_roots(roots))
        return true;
    pw_error(messages, spec->at, "the gain factor or a root of the stage is out of range; expected "
             "frequencies and gains of a physical size");
    return false;
}

pw_status pw_analog_build(const pw_analog_spec *spec, pw_roots *out, pw_messages *messages)
{
    pw_status status = collect(spec, out, messages);
    if (status != PW_OK)
        return status;
    bool good = check_proper(spec, out, messages);
    good = check_integrators(spec, out, messages) && good;
    good = check_range(spec, out, messages) && good;
    return good ? PW_OK : PW_WRONG;
}
