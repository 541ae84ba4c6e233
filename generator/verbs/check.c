/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/json.h"
#include "report/text.h"
#include "verbs/analysis.h"

static pw_status run(const pw_call *call)
{
    static pw_analysis analysis;   /* some hundred kilobytes: not for the stack */
    pw_status status = pw_analysis_run(call, &analysis);
    if (!status) {
        pw_text out = {0};
        if (call->json) pw_report_json(&analysis.results, &out);
        else if (!call->quiet) pw_report_text(&analysis.results, call->color, call->verbose, &out);
        pw_say(&out);
        pw_text_free(&out);
        status = pw_analysis_verdict(&analysis);
    }
    pw_analysis_free(&analysis);
    return status;
}

const pw_verb pw_verb_check = {
    .name = "check", .summary = "run the analysis and judge every limit; writes nothing",
    .run = run, .needs_stage = true,
    .examples = "  polewright check stage.yaml\n"
                "  polewright check stage.yaml --set arithmetic.sample=q15 --set 'limits.magnitude=0.1 dB'\n"
                "  polewright check stage.yaml --json | jq .nodes\n",
};
