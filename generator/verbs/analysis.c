/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "verbs/analysis.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "analog/spread.h"
#include "analog/cell.h"
#include "base/files.h"
#include "report/judge.h"
#include "report/response.h"
#include "stagefile/read.h"
#include "target/cost.h"
#include "target/fits.h"

#define LARGEST_STAGE_FILE (1 << 20)

pw_status pw_analysis_tell(const pw_call *call, pw_analysis *analysis, pw_status status)
{
    pw_messages_print(&analysis->messages, stderr, call->quiet);
    return status;
}

pw_status pw_analysis_read(const pw_call *call, pw_analysis *analysis)
{
    pw_text yaml = {0}, target = {0};
    analysis->messages.file = strcmp(call->stage, "-") ? call->stage : "stdin";
    pw_status status = pw_file_read(call->stage, LARGEST_STAGE_FILE, &yaml);
    if (!status) {
        const char **sets = pw_take((size_t)(call->sets + 1) * sizeof *sets);
        int n = call->sets;
        if (n) memcpy(sets, call->set, (size_t)n * sizeof *sets);
        if (call->target) {
            pw_text_print(&target, "target=%s", call->target);
            sets[n++] = pw_text_string(&target);
        }
        status = pw_stage_read(&yaml, sets, n, &analysis->stage, &analysis->messages);
        free(sets);
        const pw_stage *stage = &analysis->stage;
        if (stage->target && pw_target_check(stage->target, stage->target_at, &analysis->messages) && !status)
            status = PW_WRONG;
        if (status == PW_WRONG) pw_cells_check_kinds(&stage->analog, &analysis->messages);
    }
    pw_text_free(&target);
    pw_text_free(&yaml);
    return pw_analysis_tell(call, analysis, status);
}

pw_status pw_analysis_model(const pw_call *call, pw_analysis *analysis)
{
    analysis->results.stage = &analysis->stage;
    pw_status status = pw_analog_build(&analysis->stage.analog, &analysis->results.analog, &analysis->messages);
    return pw_analysis_tell(call, analysis, status);
}

/* The last net under the search for words: nothing that is no number goes on to a verdict or to C. */
static pw_status check_words(const pw_realisation *r)
{
    for (int i = 0; i < r->count; i++)
        for (int k = 0; k < 3; k++)
            if (!isfinite(r->section[i].realised_b[k]) || !isfinite(r->section[i].realised_a[k])) {
                fprintf(stderr, "polewright: the words of section %d did not come out as numbers; try another"
                        " arithmetic.structure or transform.method\n", i + 1);
                return PW_FAILED;
            }
    return PW_OK;
}

static pw_status realise(pw_analysis *analysis)
{
    const pw_stage *stage = &analysis->stage;
    pw_results *r = &analysis->results;
    pw_status status = pw_target_read(stage->target, stage->target_at, &r->target, &analysis->messages);
    if (!status) status = pw_discretise(stage, &r->analog, &r->digital, &analysis->messages);
    if (!status)
        status = pw_realise(stage, &r->analog, &r->digital, &r->target, &r->realisation, &analysis->messages);
    return status ? status : check_words(&r->realisation);
}

pw_status pw_analysis_results(const pw_call *call, pw_analysis *analysis)
{
    pw_status status = pw_analysis_read(call, analysis);
    if (!status) status = pw_analysis_model(call, analysis);
    if (!status) status = pw_analysis_tell(call, analysis, realise(analysis));
    if (status) return status;
    pw_results *r = &analysis->results;
    pw_response_analyse(&analysis->stage, &r->analog, &r->digital, &r->realisation, &r->response);
    pw_cost_estimate(&analysis->stage, &r->realisation, &r->target, &r->cost);
    status = pw_target_fits(&analysis->stage, &r->target, &r->cost, &analysis->messages);
    if (status) return pw_analysis_tell(call, analysis, status);
    pw_judge(r);
    return PW_OK;
}

pw_status pw_analysis_run(const pw_call *call, pw_analysis *analysis)
{
    pw_status status = pw_analysis_results(call, analysis);
    if (status) return status;
    pw_results *r = &analysis->results;
    const pw_spread_options options = {.quiet = call->quiet};
    status = pw_spread_compute(&analysis->stage, &r->analog, &options, &r->spread, &analysis->messages);
    return pw_analysis_tell(call, analysis, status);
}

const char *pw_analysis_directory(const pw_call *call, pw_analysis *analysis)
{
    if (call->directory) return call->directory;
    return pw_arena_print(&analysis->stage.arena, "%s.out", analysis->stage.name);
}

pw_status pw_analysis_verdict(const pw_analysis *analysis)
{
    return analysis->results.met ? PW_OK : PW_NOT_MET;
}

void pw_analysis_free(pw_analysis *analysis)
{
    pw_spread_free(analysis->results.spread);
    pw_target_free(&analysis->results.target);
    pw_messages_free(&analysis->messages);
    pw_stage_free(&analysis->stage);
}

void pw_say(const pw_text *text)
{
    fwrite(pw_text_string(text), 1, text->size, stdout);
}
