/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What only the whole file can show: frequencies against the rate, one side of a signal against
 * itself, structures against formats. */
#include <math.h>
#include <string.h>

#include "stagefile/take.h"

/* ---- against the rate ---- */

static void check_below_half(pw_reader *reader, const char *key, double hz, pw_where at)
{
    char shown[PW_NUMBER_ROOM], half[PW_NUMBER_ROOM], rate[PW_NUMBER_ROOM];
    double given = reader->stage->rate_hz;
    if (!(given > 0) || hz < given / 2) return;
    pw_error(reader->messages, at, "%s: %s is not below half the rate, %s; expected less, or a rate above %s",
             key, pw_si(shown, hz, "Hz", 6), pw_si(half, given / 2, "Hz", 6), pw_si(rate, 2 * hz, "Hz", 6));
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

/* ---- one side of the signal ---- */

static void check_rails(pw_reader *reader, const pw_port *port)
{
    if (!port->has_rails) return;
    if (port->rail[0] > port->zero || port->rail[1] < port->zero)
        pw_error(reader->messages, port->at, "signal.output.rails: zero, %g V, is not between the rails, "
                 "%g V and %g V; expected rails around it", port->zero, port->rail[0], port->rail[1]);
    if (port->rail[1] <= port->low || port->rail[0] >= port->high)
        pw_error(reader->messages, port->at, "signal.output.rails: %g V to %g V lie outside the span, %g V "
                 "to %g V; expected rails within it", port->rail[0], port->rail[1], port->low, port->high);
}

static void check_port(pw_reader *reader, const char *side, pw_port *port, bool sound)
{
    port->full_scale = 1;
    if (!port->given) {
        port->low = -1;
        port->high = 1;
        port->peak = 1;
        return;
    }
    if (!sound) return;
    if (!(port->low < port->high))
        pw_error(reader->messages, port->at, "signal.%s: high, %g, is not above low, %g; expected a span such "
                 "as {low: 0 V, high: 3.3 V}", side, port->high, port->low);
    else if (port->zero < port->low || port->zero > port->high)
        pw_error(reader->messages, port->at, "signal.%s: zero, %g, is outside low to high, %g to %g; expected "
                 "it between them", side, port->zero, port->low, port->high);
    else {
        port->full_scale = fmax(port->high - port->zero, port->zero - port->low);
        if (port->peak == 0) port->peak = port->full_scale;
        if (port->peak > port->full_scale)
            pw_error(reader->messages, port->at, "signal.%s.peak: %g is above full scale, %g; expected less, "
                     "or a larger span", side, port->peak, port->full_scale);
        check_rails(reader, port);
    }
}

/* ---- formats ---- */

static void check_structure(pw_reader *reader)
{
    const pw_arithmetic *a = &reader->stage->arithmetic;
    bool floats = a->sample == PW_FLOAT32 || a->sample == PW_FLOAT64;
    bool fixed_only = a->structure == PW_DIRECT_1_SHAPED || a->structure == PW_COUPLED;
    if (floats ? !fixed_only : a->structure != PW_TRANSPOSED_2) return;
    pw_error(reader->messages, a->structure_at, "arithmetic.structure: %s does not go with %s; expected %s",
             pw_structure_word(a->structure), pw_sample_word(a->sample),
             floats ? "auto, direct-1 or transposed-2, or sample: q15 or q31"
                    : "auto, direct-1, direct-1-shaped or coupled, or sample: float32 or float64");
}

static void check_coefficient(pw_reader *reader)
{
    pw_arithmetic *a = &reader->stage->arithmetic;
    bool floats = a->sample == PW_FLOAT32 || a->sample == PW_FLOAT64;
    if (floats && a->coefficient_bits)
        pw_warning(reader->messages, a->coefficient_at, "arithmetic.coefficient has no meaning with %s; it "
                   "goes with sample: q15 or q31", pw_sample_word(a->sample));
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

void pw_stage_check(pw_reader *reader, bool sound)
{
    pw_stage *stage = reader->stage;
    check_frequencies(reader);
    check_port(reader, "input", &stage->input, sound);
    check_port(reader, "output", &stage->output, sound);
    check_structure(reader);
    check_coefficient(reader);
    if (stage->limits.cycles.given && !stage->target_given)
        pw_error(reader->messages, stage->limits.cycles.at, "limits.cycles without a target; expected "
                 "a target such as target: cortex-m4f");
    fill_band(stage);
    fill_signals(&stage->vectors);
}
