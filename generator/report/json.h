/* SPDX-License-Identifier: GPL-3.0-or-later */
/* report.json: everything that was found out, for programs.
 *
 * The fields of the contract are always there, in its order. A figure that does not exist (an
 * infinite bound, round-off of a float) is null, never left out. Beside them stand, under names of
 * their own, figures that the program has and the contract does not ask for:
 *     about, arithmetic, signal           what the stage file asked for, defaults filled in
 *     analog.log10_factor                 of |K|, which may lie outside the range of a double
 *     transform.zeros_at_infinity         "nyquist", "keep-one" or "keep" of matched-z, else null
 *     transform.candidates[].prewarp_hz, .zeros_at_infinity, .possible
 *     sections[].realised.words           coupled: sigma omega g c1 c2 d, with their fraction bits;
 *                                         null otherwise
 *     sections[].realised.error_feedback  [k1, k2] of a shaped section, null otherwise
 *     sections[].realised.cannot_clip, .accumulator_bits
 *     response.*_error.delay_s, response.table[].analog_delay_s, .digital_delay_s
 *     nodes[].peak_gain, .headroom_bits, .samples_to_clip_one_code
 *     first_clip                          {node, input}: where and from which input level (of full
 *                                         scale) clipping is possible; input null: from none
 *     noise.effective_bits, .input_quantisation_rms_lsb, .growth_lsb2_per_sample
 *     limit_cycle.found_period
 *     cost.stack_bytes */
#ifndef PW_REPORT_JSON_H
#define PW_REPORT_JSON_H

#include "base/text.h"
#include "report/results.h"

/* Adds the report to out: UTF-8, indented, one newline at the end. Never fails (memory aside). */
void pw_report_json(const pw_results *results, pw_text *out);

#endif
