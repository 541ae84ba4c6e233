/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Warnings about roots above half the rate. */
#include <math.h>
#include <stdio.h>

#include "base/text.h"
#include "discrete/choice.h"
#include "discrete/transforms.h"

static bool is_root(const pw_root *root, double complex s)
{
    double near = 1e-9 * cabs(s);
    return cabs(root->s - s) <= near || cabs(conj(root->s) - s) <= near ||
           (root->double_real && cabs(root->s2 - s) <= near);
}

/* Where the user wrote this root, or the description that it comes from. */
static pw_where place_of(const pw_analog_spec *spec, double complex s, bool pole)
{
    if (spec->kind == PW_ANALOG_ROOTS) {
        const pw_root *list = pole ? spec->pole : spec->zero;
        for (int i = 0; i < (pole ? spec->poles : spec->zeros); i++)
            if (is_root(&list[i], s)) return list[i].at;
    }
    if (spec->kind == PW_ANALOG_CASCADE)
        for (int i = 0; i < spec->members; i++) {
            pw_where at = place_of(&spec->member[i], s, pole);
            bool own = at.line != spec->member[i].at.line || at.column != spec->member[i].at.column;
            if (own) return at;
        }
    return spec->at;
}

/* Where a frequency above half the rate folds to. */
static double folded(double hz, double rate_hz)
{
    return fabs(hz - rate_hz * round(hz / rate_hz));
}

/* What becomes of it, in the digital model: a phrase. */
static void fate(const pw_digital *digital, double rate_hz, double complex s, bool pole, char *out,
                 size_t room)
{
    char said[PW_NUMBER_ROOM];
    double hz = cabs(s) / (2 * M_PI), turning = fabs(cimag(s)) / (2 * M_PI);
    double warped = digital->prewarp == PW_PREWARP_AT ? digital->prewarp_hz : 0;
    switch (digital->method) {
    case PW_BILINEAR:
        hz = atan(2 * M_PI * hz / (double)pw_bilinear_constant(rate_hz, warped)) * rate_hz / M_PI;
        snprintf(out, room, "bilinear bends it down to %s", pw_si(said, hz, "Hz", 4));
        return;
    case PW_MATCHED_Z:
    case PW_IMPULSE_INVARIANT:
    case PW_STEP_INVARIANT:
        if (!pole && digital->method != PW_MATCHED_Z)
            snprintf(out, room, "%s finds zeros of its own", pw_method_word(digital->method));
        else if (turning > rate_hz / 2)
            snprintf(out, room, "%s folds it to %s", pw_method_word(digital->method),
                     pw_si(said, folded(turning, rate_hz), "Hz", 4));
        else
            snprintf(out, room, "%s keeps its decay, and what it does above half the rate is lost",
                     pw_method_word(digital->method));
        return;
    case PW_BEST:
        break;
    }
    snprintf(out, room, "it cannot be kept in place");
}

static void warn(const pw_stage *stage, const pw_digital *digital, double complex s, bool pole,
                 pw_where at, pw_messages *messages)
{
    char said[PW_NUMBER_ROOM], half[PW_NUMBER_ROOM], would_do[PW_NUMBER_ROOM], becomes[160];
    double hz = cabs(s) / (2 * M_PI);
    fate(digital, stage->rate_hz, s, pole, becomes, sizeof becomes);
    pw_warning(messages, at,
               "a %s at %s lies above half the rate, %s: %s; a rate above %s would hold it",
               pole ? "pole" : "zero", pw_si(said, hz, "Hz", 4),
               pw_si(half, stage->rate_hz / 2, "Hz", 6), becomes, pw_si(would_do, 2 * hz, "Hz", 4));
}

/* Of several roots that come from one place, only the fastest is told. */
static void warn_list(const pw_stage *stage, const pw_digital *digital, const double complex *root,
                      int n, bool pole, pw_messages *messages)
{
    pw_where at[PW_MAX_ROOTS];
    for (int i = 0; i < n; i++) at[i] = place_of(&stage->analog, root[i], pole);
    for (int i = 0; i < n; i++) {
        bool told = cabs(root[i]) <= M_PI * stage->rate_hz || cimag(root[i]) < 0;
        for (int k = 0; k < n && !told; k++) {
            bool same = at[k].line == at[i].line && at[k].column == at[i].column && k != i;
            double differ = cabs(root[k]) - cabs(root[i]);
            told = same && (differ > 0 || (differ == 0 && k < i && cimag(root[k]) >= 0));
        }
        if (!told) warn(stage, digital, root[i], pole, at[i], messages);
    }
}

void pw_warn_beyond(const pw_stage *stage, const pw_roots *analog, const pw_digital *digital,
                    pw_messages *messages)
{
    warn_list(stage, digital, analog->pole, analog->poles, true, messages);
    warn_list(stage, digital, analog->zero, analog->zeros, false, messages);
}
