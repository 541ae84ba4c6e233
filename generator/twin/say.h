/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the twin found, for people and for programs. */
#ifndef PW_TWIN_SAY_H
#define PW_TWIN_SAY_H

#include "base/text.h"
#include "twin/compare.h"
#include "twin/fit.h"

/* Everything of one run; null: not made. */
typedef struct pw_twin_found {
    const pw_results *results;
    const pw_comparison *comparison;     /* --record */
    const pw_points *points;             /* --response, or those of the comparison */
    const pw_fit *fit;                   /* --calibrate */
    const char *written;                 /* the stage file that was written */
} pw_twin_found;

/* verbose: every point; else about twelve of them. */
void pw_twin_text(const pw_twin_found *found, bool verbose, pw_text *out);

/* {"format": "polewright-twin-1", "stage", "rate_hz", "record": {..} | null, "reference": {..} |
 * null, "points": [..], "worst": {..} | null, "envelope": {..} | null, "calibration": {..} | null,
 *  "verdict": "agrees" | "differs" | "not judged"} */
void pw_twin_json(const pw_twin_found *found, pw_text *out);

/* "agrees", "differs" or "not judged". */
const char *pw_twin_verdict(const pw_points *points);

#endif
