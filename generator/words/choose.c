/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Which structure each section gets. Cost rises from direct-1 (5 multiplications) over
 * direct-1-shaped (two shifts or small products more) to coupled (8 multiplications) on every
 * target. */
#include "words/job.h"
#include "words/noise.h"

#include <math.h>
#include <string.h>

#define QUIET 1.0                /* LSB^2: what a section's own rounding may reach unasked */

static const char *const WHY_FLOAT = "transposed-2 is the short form for floats";
static const char *const WHY_PLAIN =
    "direct-1 is the cheapest, and the rounding of each section stays below 1 LSB rms";
static const char *const WHY_SHAPED =
    "direct-1, with error feedback where plain rounding would exceed 1 LSB rms or hold a value "
    "for ever";
static const char *const WHY_LIMIT = "the cheapest that meets the noise limit";
static const char *const WHY_QUIETEST = "the quietest; no structure here meets the noise limit";
static const char *const WHY_COUPLED =
    "coupled where the words of direct-1 would move the poles too far; zeros there are exact to "
    "a word";

/* ---- words that would do ---- */

static double deviation_with(pw_job *job, int bits)
{
    pw_realisation *keep = job->out, trial = *keep;
    pw_job saved = *job;
    job->out = &trial;
    job->format.word_bits = bits;
    double worst = INFINITY;
    if (pw_job_words(job)) {
        pw_deviation_monic(job);
        worst = trial.word_magnitude_db.max;
    }
    *job = saved;
    job->out = keep;
    return worst;
}

/* The shortest words up to 32 bits, longer than now, that keep the deviation with a fifth to spare
 * (the last word is luck, and scales move a little after this); 0: none. Deviation falls by half a
 * bit, not always by each: found by halving. */
static int bits_for(pw_job *job, double deviation_db)
{
    int low = job->format.word_bits, high = 32;
    deviation_db *= 0.8;
    if (low >= high || !(deviation_with(job, high) <= deviation_db))
        return 0;
    while (high - low > 1) {
        int middle = (low + high) / 2;
        if (deviation_with(job, middle) <= deviation_db)
            high = middle;
        else
            low = middle;
    }
    return high;
}

static pw_status complain(pw_job *job)
{
    int section = job->unstable;
    pw_where at = job->stage->arithmetic.coefficient_at;
    if (at.line == 0)
        at = job->stage->arithmetic.at;
    int bits = bits_for(job, 0.5);
    if (bits)
        pw_error(job->messages, at,
                 "coefficient words of %d bits move the poles of section %d onto or outside the unit "
                 "circle; expected coefficient: 32 bits (%d bits would do)",
                 job->format.word_bits, section, bits);
    else
        pw_error(job->messages, at,
                 "no coefficient words of up to 32 bits hold the poles of section %d; expected "
                 "%sfloat samples or a lower rate", section,
                 pw_coupled_suits(&job->format, &job->out->ideal[section - 1]) ? "structure: coupled, "
                                                                               : "");
    return PW_WRONG;
}

/* ---- the choice ---- */

static bool zero_at_one(const pw_section *section)
{
    for (int k = 0; k < section->zeros; k++)
        if (section->zero[k] == 1)
            return true;
    return false;
}

/* A section that blocks a constant, and yet would rest more than one LSB from zero: plain rounding
 * moves y no more where |(1 + a1 + a2) y| is at most half an LSB. */
static bool holds_offset(const pw_section *section)
{
    return zero_at_one(section) && fabs(1 + section->a[1] + section->a[2]) <= 0.25;
}

static void set_all(pw_job *job, pw_structure structure)
{
    for (int k = 0; k < job->out->count; k++)
        job->structure[k] = structure;
}

static bool may_couple(const pw_job *job, int k)
{
    return job->structure[k] != PW_COUPLED && pw_coupled_suits(&job->format, &job->out->ideal[k]);
}

/* Words; a section whose words fail is turned into the rotation form where it can be: the only
 * case in which a zero at 1 is given up for one that is exact to a word. */
static bool words_or_couple(pw_job *job)
{
    while (!pw_job_words(job)) {
        int k = job->unstable - 1;
        if (!may_couple(job, k))
            return false;
        job->structure[k] = PW_COUPLED;
        job->out->structure_why = WHY_COUPLED;
    }
    return true;
}

/* What the words bend the response by, against what they may: with a limit on magnitude, the
 * largest deviation in dB and a quarter of the limit (the transform has its part); without one,
 * the error against the largest response and what words of that length mostly do. */
static double excess_bend(pw_job *job)
{
    const pw_given *limit = &job->stage->limits.magnitude_db;
    pw_deviation_monic(job);
    if (limit->given)
        return job->out->word_magnitude_db.max / (fabs(limit->value) / 4);
    return pw_bend(job) / (job->format.word_bits == 32 ? 0.002 : 0.2);
}

/* Where the words bend the response too much, the sections that do become coupled, if that
 * helps. */
static bool straighten(pw_job *job)
{
    pw_structure before[PW_MAX_SECTIONS];
    const char *why = job->out->structure_why;
    double excess = excess_bend(job), whole = pw_bend(job);
    if (excess <= 1)
        return true;
    memcpy(before, job->structure, sizeof before);
    bool changed = false;
    for (int k = 0; k < job->out->count; k++)
        if (may_couple(job, k) && !zero_at_one(&job->out->ideal[k])
            && pw_section_bend(job, k) > whole / (2 * job->out->count)) {
            job->structure[k] = PW_COUPLED;
            changed = true;
        }
    if (!changed)
        return true;
    job->out->structure_why = WHY_COUPLED;
    if (pw_job_words(job) && excess_bend(job) < excess / 2)
        return true;
    memcpy(job->structure, before, sizeof before);
    job->out->structure_why = why;
    return pw_job_words(job);
}

/* Whether error feedback does anything for section k. */
static bool shapes(const pw_job *job, int k)
{
    int32_t k1, k2;
    if (job->out->ideal[k].order == 0)
        return false;
    pw_choose_feedback(job->out->ideal[k].a, pw_integrates_from(job->out, k), &k1, &k2);
    return k1 != 0 || k2 != 0;
}

/* Error feedback for the section that adds most noise, until the limit is met. */
static bool quieten(pw_job *job, double limit_dbfs)
{
    job->out->structure_why = WHY_LIMIT;
    while (job->out->noise.output_dbfs > limit_dbfs) {
        int loudest = -1;
        for (int k = 0; k < job->out->count; k++)
            if (job->structure[k] == PW_DIRECT_1 && shapes(job, k)
                && (loudest < 0 || job->share[k] > job->share[loudest]))
                loudest = k;
        if (loudest < 0) {
            job->out->structure_why = WHY_QUIETEST;
            return true;
        }
        job->structure[loudest] = PW_DIRECT_1_SHAPED;
        if (!pw_job_solve(job))
            return false;
    }
    return true;
}

static bool automatic(pw_job *job)
{
    const pw_given *noise = &job->stage->limits.noise_db;
    set_all(job, PW_DIRECT_1);
    job->out->structure_why = noise->given ? WHY_LIMIT : WHY_PLAIN;
    for (int k = 0; k < job->out->count; k++) {
        const pw_section *section = &job->out->ideal[k];
        bool loud = !noise->given && pw_feedback_power(section->a, 0, 0) / 12 > QUIET;
        bool holds = pw_integrates_from(job->out, k) || holds_offset(section);
        if ((loud || holds) && shapes(job, k)) {
            job->structure[k] = PW_DIRECT_1_SHAPED;
            job->out->structure_why = WHY_SHAPED;
        }
    }
    if (!words_or_couple(job) || !straighten(job) || !pw_job_solve(job))
        return false;
    return !noise->given || quieten(job, -fabs(noise->value));
}

static pw_status refuse(pw_job *job, const char *what, const char *expected)
{
    pw_where at = job->stage->arithmetic.structure_at;
    pw_error(job->messages, at.line ? at : job->stage->arithmetic.at, "%s; expected %s", what,
             expected);
    return PW_WRONG;
}

/* The rotation form is for complex pairs; what else there is stays direct. */
static bool named_coupled(pw_job *job)
{
    bool any = false;
    for (int k = 0; k < job->out->count; k++) {
        const pw_section *section = &job->out->ideal[k];
        bool suits = pw_coupled_suits(&job->format, section);
        job->structure[k] = suits ? PW_COUPLED : shapes(job, k) ? PW_DIRECT_1_SHAPED : PW_DIRECT_1;
        any = any || suits;
    }
    return any;
}

pw_status pw_job_choose(pw_job *job)
{
    pw_structure asked = job->stage->arithmetic.structure;
    bool direct = asked == PW_DIRECT_1 || asked == PW_STRUCTURE_AUTO;
    if (!job->format.fixed && !direct && asked != PW_TRANSPOSED_2)
        return refuse(job, "this structure is for fixed point (q15, q31)",
                      "auto, direct-1 or transposed-2");
    if (job->format.fixed && asked == PW_TRANSPOSED_2)
        return refuse(job, "transposed-2 is for float samples",
                      "auto, direct-1, direct-1-shaped or coupled");
    job->out->structure_why = "";
    if (job->format.fixed && asked == PW_STRUCTURE_AUTO)
        return automatic(job) ? PW_OK : complain(job);
    if (asked == PW_STRUCTURE_AUTO)
        job->out->structure_why = WHY_FLOAT;
    set_all(job, asked == PW_STRUCTURE_AUTO ? PW_TRANSPOSED_2 : asked);
    if (asked == PW_COUPLED && !named_coupled(job))
        return refuse(job, "the coupled form needs a complex pair of poles",
                      "auto, direct-1 or direct-1-shaped");
    return pw_job_solve(job) ? PW_OK : complain(job);
}

/* Where the deviation is past the limit: which words would keep it. */
int pw_job_enough_bits(pw_job *job)
{
    const pw_given *limit = &job->stage->limits.magnitude_db;
    double most = limit->given ? fabs(limit->value) : 0.5;
    pw_deviation_monic(job);
    if (!job->format.fixed || job->out->word_magnitude_db.max <= most)
        return job->format.word_bits;
    return bits_for(job, most);
}
