/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The way through that the verbs share: stage file -> ... -> results, every status checked. */
#ifndef PW_VERBS_ANALYSIS_H
#define PW_VERBS_ANALYSIS_H

#include "report/results.h"
#include "verbs/verbs.h"

typedef struct pw_analysis {
    pw_stage stage;
    pw_messages messages;
    pw_results results;
} pw_analysis;

/* Reads call->stage with the --set and --target overrides. Prints every message. */
PW_CHECKED pw_status pw_analysis_read(const pw_call *call, pw_analysis *analysis);
/* The analog model of what was read. */
PW_CHECKED pw_status pw_analysis_model(const pw_call *call, pw_analysis *analysis);
/* All of it: read, model, transform, words, response, cost, limits, spread of tolerances. */
PW_CHECKED pw_status pw_analysis_run(const pw_call *call, pw_analysis *analysis);
/* All of it but for the spread. */
PW_CHECKED pw_status pw_analysis_results(const pw_call *call, pw_analysis *analysis);
/* Prints the messages so far: warnings only where not --quiet. Returns status. */
pw_status pw_analysis_tell(const pw_call *call, pw_analysis *analysis, pw_status status);
void pw_analysis_free(pw_analysis *analysis);

/* The directory files go to: -o, or <stage>.out here. In the stage's arena. */
const char *pw_analysis_directory(const pw_call *call, pw_analysis *analysis);

/* PW_OK or PW_NOT_MET by the verdict. */
pw_status pw_analysis_verdict(const pw_analysis *analysis);

/* Writes text to standard output; whether it arrived is checked at the end of the run. */
void pw_say(const pw_text *text);

#endif
