/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The station's door: judges what the stage asks for, makes the one transform or the best one. */
#include <math.h>
#include <string.h>

#include "base/text.h"
#include "discrete/choice.h"
#include "discrete/transforms.h"

static bool below_half(const pw_stage *stage, double hz, const char *what, pw_where at,
                       pw_messages *messages)
{
    char said[PW_NUMBER_ROOM], half[PW_NUMBER_ROOM], rate[PW_NUMBER_ROOM];
    if (hz < stage->rate_hz / 2) return true;
    pw_error(messages, at, "%s %s is not below half the rate, %s; a rate above %s would do", what,
             pw_si(said, hz, "Hz", 6), pw_si(half, stage->rate_hz / 2, "Hz", 6),
             pw_si(rate, 2 * hz, "Hz", 6));
    return false;
}

/* Every mistake is told, so no short cut between the checks. */
static bool frequencies_fit(const pw_stage *stage, pw_messages *messages)
{
    const pw_transform *t = &stage->transform;
    bool fit = below_half(stage, stage->limits.band_hz[0], "the band's lower end",
                          stage->limits.band_at[0], messages);
    fit &= below_half(stage, stage->limits.band_hz[1], "the band's upper end",
                      stage->limits.band_at[1], messages);
    if (t->prewarp == PW_PREWARP_AT)
        fit &= below_half(stage, t->prewarp_hz, "prewarp", t->prewarp_at, messages);
    if (t->match_gain_hz.given)
        fit &= below_half(stage, t->match_gain_hz.value, "match-gain", t->match_gain_hz.at,
                          messages);
    return fit;
}

bool pw_candidate_make(const pw_stage *stage, const pw_roots *analog, const pw_candidate *how,
                       pw_roots *z)
{
    double rate = stage->rate_hz;
    switch (how->method) {
    case PW_BILINEAR:
        if (how->prewarp == PW_PREWARP_EACH_SECTION) pw_bilinear_each(analog, rate, z);
        else pw_bilinear(analog, rate, how->prewarp == PW_PREWARP_AT ? how->prewarp_hz : 0, z);
        return true;
    case PW_MATCHED_Z:
        pw_matched(analog, rate, how->zeros_at_infinity, z);
        return true;
    case PW_IMPULSE_INVARIANT:
        return pw_impulse_invariant(analog, rate, z);
    case PW_STEP_INVARIANT:
        return pw_step_invariant(analog, rate, z);
    case PW_BEST:
        break;
    }
    return false;
}

/* What the stage names, when it names a method. */
static pw_candidate named(const pw_transform *t)
{
    pw_candidate how = {.method = t->method, .prewarp = PW_PREWARP_NONE,
                        .zeros_at_infinity = t->zeros_at_infinity, .possible = true};
    if (t->method == PW_BILINEAR && t->prewarp != PW_PREWARP_DEFAULT) how.prewarp = t->prewarp;
    if (how.prewarp == PW_PREWARP_AT) how.prewarp_hz = t->prewarp_hz;
    return how;
}

/* Poles that double cannot tell from the unit circle would turn a decay into an integrator. */
static bool poles_inside(const pw_stage *stage, const pw_roots *analog, const pw_roots *z,
                         pw_messages *messages)
{
    for (int i = 0; i < z->poles; i++) {
        if (analog->pole[i] == 0 || cabs(z->pole[i]) < 1) continue;
        pw_error(messages, stage->rate_at,
                 "a pole that decays at %.4g rad/s cannot be told from one that does not, at this "
                 "rate, in double precision; a much lower rate would do", -creal(analog->pole[i]));
        return false;
    }
    return true;
}

static pw_status no_form(const pw_stage *stage, const pw_roots *analog, pw_messages *messages)
{
    if (analog->zeros == analog->poles) {
        pw_error(messages, stage->transform.method_at,
                 "a stage with as many zeros as poles (%d) has no impulse-invariant form: its "
                 "impulse response holds an impulse; bilinear, matched-z or step-invariant would "
                 "do",
                 analog->poles);
        return PW_WRONG;
    }
    pw_error(messages, stage->transform.method_at,
             "%s found no form for these roots; another method was expected",
             pw_method_word(stage->transform.method));
    return PW_FAILED;
}

static bool no_match(const pw_stage *stage, double hz, pw_messages *messages)
{
    const pw_given *asked = &stage->transform.match_gain_hz;
    char said[PW_NUMBER_ROOM];
    pw_error(messages, asked->given ? asked->at : stage->transform.method_at,
             "the gain cannot be matched at %s, where it is zero or without bound; a frequency "
             "away from the roots was expected", pw_si(said, hz, "Hz", 6));
    return false;
}

/* A zero on the axis, to the rounding of what the user wrote, within a millionth of the place. */
static bool on_a_zero(const pw_roots *analog, double hz)
{
    double w = 2 * M_PI * hz;
    for (int i = 0; i < analog->zeros; i++) {
        double complex s = analog->zero[i];
        if (hypot(creal(s), cimag(s) - w) <= 1e-6 * fmax(cabs(s), w)) return true;
    }
    return false;
}

/* The analog side of a match that the user asked for, before anything is made. */
static bool match_can_be(const pw_stage *stage, const pw_roots *analog, pw_messages *messages)
{
    const pw_given *asked = &stage->transform.match_gain_hz;
    if (!asked->given) return true;
    double level = cabs(pw_analog_at(analog, asked->value));
    if (isfinite(level) && !on_a_zero(analog, asked->value)) return true;
    return no_match(stage, asked->value, messages);
}

pw_status pw_discretise(const pw_stage *stage, const pw_roots *analog, pw_digital *out,
                        pw_messages *messages)
{
    memset(out, 0, sizeof *out);
    if (!frequencies_fit(stage, messages) || !match_can_be(stage, analog, messages))
        return PW_WRONG;
    if (stage->transform.method == PW_BEST) {
        if (!pw_best(stage, analog, out)) return no_form(stage, analog, messages);
    } else {
        out->candidate[0] = named(&stage->transform);
        out->candidates = 1;
        if (!pw_candidate_make(stage, analog, out->candidate, &out->z))
            return no_form(stage, analog, messages);
    }
    const pw_candidate *chosen = out->candidate;
    out->method = chosen->method;
    out->prewarp = chosen->prewarp;
    out->prewarp_hz = chosen->prewarp_hz;
    out->zeros_at_infinity = chosen->zeros_at_infinity;
    if (!pw_candidate_gain(stage, analog, chosen, out)) {
        no_match(stage, out->match_gain_hz, messages);
        return PW_WRONG;
    }
    if (!poles_inside(stage, analog, &out->z, messages)) return PW_WRONG;
    pw_candidate_judge(stage, analog, out->candidate, &out->z);
    pw_warn_beyond(stage, analog, out, messages);
    return PW_OK;
}
