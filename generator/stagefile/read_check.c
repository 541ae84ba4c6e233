/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What only the whole file can show: frequencies against the rate, structures against formats. */
#include <math.h>
#include <string.h>

#include "stagefile/take.h"

/* ---- against the rate ---- */

static void check_below_half(pw_reader *reader, const char *key, double hz, pw_where at)
{
    char shown[PW_NUMBER_ROOM], half[PW_NUMBER_ROOM], rate[PW_NUMBER_ROOM];
    double given = reader->stage->rate_hz;
    if (!(given > 0) || hz < given / 2) return;
    pw_error(reader->messages, at,
             "%s: %s is not below half the rate, %s; expected less, or a rate above %s", key,
             pw_si(shown, hz, "Hz", 6), pw_si(half, given / 2, "Hz", 6),
             pw_si(rate, 2 * hz, "Hz", 6));
}

static void check_frequencies(pw_reader *reader)
{
    const pw_stage *stage = reader->stage;
    const pw_transform *transform = &stage->transform;
    if (transform->prewarp == PW_PREWARP_AT)
        check_below_half(reader, "transform.prewarp", transform->prewarp_hz, transform->prewarp_at);
    if (transform->match_gain_hz.given)
        check_below_half(reader, "transform.match-gain", transform->match_gain_hz.value,
                         transform->match_gain_hz.at);
    for (int i = 0; i < 2 && stage->limits.band_given; i++)
        check_below_half(reader, "limits.band", stage->limits.band_hz[i], stage->limits.band_at[i]);
}

/* A file keeps its prewarp while --set tries other methods: no more than a warning. */
static void check_transform(pw_reader *reader)
{
    const pw_transform *t = &reader->stage->transform;
    if (t->prewarp != PW_PREWARP_DEFAULT && t->method != PW_BILINEAR && t->method != PW_BEST)
        pw_warning(reader->messages, t->prewarp_at,
                   "transform.prewarp has no meaning with %s; it goes with "
                   "method: bilinear or best",
                   pw_method_word(t->method));
}

/* ---- formats ---- */

static void check_structure(pw_reader *reader)
{
    const pw_arithmetic *a = &reader->stage->arithmetic;
    bool floats = a->sample == PW_FLOAT32 || a->sample == PW_FLOAT64;
    bool fixed_only = a->structure == PW_DIRECT_1_SHAPED || a->structure == PW_COUPLED;
    if (floats ? !fixed_only : a->structure != PW_TRANSPOSED_2) return;
    pw_error(reader->messages, a->structure_at,
             "arithmetic.structure: %s does not go with %s; expected %s",
             pw_structure_word(a->structure), pw_sample_word(a->sample),
             floats ? "auto, direct-1 or transposed-2, or sample: q15 or q31"
                    : "auto, direct-1, direct-1-shaped or coupled, or sample: float32 or float64");
}

static void check_coefficient(pw_reader *reader)
{
    pw_arithmetic *a = &reader->stage->arithmetic;
    bool floats = a->sample == PW_FLOAT32 || a->sample == PW_FLOAT64;
    if (floats && a->coefficient_bits)
        pw_warning(reader->messages, a->coefficient_at,
                   "arithmetic.coefficient has no meaning with %s; it "
                   "goes with sample: q15 or q31",
                   pw_sample_word(a->sample));
    if (floats) a->coefficient_bits = 0;
    else if (!a->coefficient_bits) a->coefficient_bits = a->sample == PW_Q15 ? 16 : 32;
}

/* ---- the rest ---- */

static void fill_band(pw_stage *stage)
{
    if (stage->limits.band_given) return;
    stage->limits.band_hz[0] = stage->rate_hz / 10000;
    stage->limits.band_hz[1] = 0.4 * stage->rate_hz;
}

static void fill_signals(pw_vectors_spec *vectors)
{
    for (int i = 0; i < PW_SIGNALS; i++)
        if (vectors->want[i]) return;
    for (int i = 0; i < PW_SIGNALS; i++) vectors->want[i] = true;
}

void pw_stage_check(pw_reader *reader)
{
    pw_stage *stage = reader->stage;
    check_frequencies(reader);
    check_transform(reader);
    check_structure(reader);
    check_coefficient(reader);
    if (stage->limits.cycles.given && !stage->target_given)
        pw_error(reader->messages, stage->limits.cycles.at,
                 "limits.cycles without a target; expected "
                 "a target such as target: cortex-m4f");
    fill_band(stage);
    fill_signals(&stage->vectors);
}
