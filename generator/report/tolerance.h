/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the reports say about circuits, and about the spread of the parts' tolerances. */
#ifndef PW_REPORT_TOLERANCE_H
#define PW_REPORT_TOLERANCE_H

#include <jansson.h>

#include "report/results.h"

/* How far the tolerances move the stage, and what share of that the replacement's own error is.
 * Nothing where results->spread is null. */
void pw_phrase_spread(const pw_results *results, pw_text *out);

/* {"parts", "draws", "seed", "unstable_draws", "magnitude_db": {"max", "at_hz"}, "phase_deg": {..},
 * "error_share": {"magnitude", "phase"}, "table": [{"hz", "db": {"nominal", "low", "high",
 * "corner_low", "corner_high"}, "deg": {..}, "delay_s": {..}}..]}, or null where there is none. */
json_t *pw_json_spread(const pw_results *results);

/* The circuits of a stage, a list, empty where there are none: {"gain": {"dc", "middle", "infinity"},
 * "middle_hz", "modes": [{"kind", "roots", "root", "f0_hz", "q", "time_constant_s"}..], "parts":
 * [{"name", "value", "tolerance", "f0_percent_per_percent": [one a mode], "q_percent_per_percent":
 * [..], "gain_db_per_percent": {"dc", "middle", "infinity"}}..]}; null where not defined. */
json_t *pw_json_circuits(const pw_stage *stage);

#endif
