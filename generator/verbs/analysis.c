/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "verbs/analysis.h"

#include <stdlib.h>
#include <string.h>

#include "base/files.h"
#include "stagefile/read.h"

#define LARGEST_STAGE_FILE (1 << 20)

pw_status pw_analysis_tell(const pw_call *call, pw_analysis *analysis, pw_status status)
{
    pw_messages_print(&analysis->messages, stderr, call->quiet);
    return status;
}

pw_status pw_analysis_read(const pw_call *call, pw_analysis *analysis)
{
    pw_text yaml = {0};
    analysis->messages.file = strcmp(call->stage, "-") ? call->stage : "stdin";
    pw_status status = pw_file_read(call->stage, LARGEST_STAGE_FILE, &yaml);
    if (!status) {
        const char **sets = pw_take((size_t)(call->sets + 1) * sizeof *sets);
        int n = call->sets;
        if (n) memcpy(sets, call->set, (size_t)n * sizeof *sets);
        if (call->target)
            sets[n++] = pw_arena_print(&analysis->stage.arena, "target=%s", call->target);
        status = pw_stage_read(&yaml, sets, n, &analysis->stage, &analysis->messages);
        free(sets);
    }
    pw_text_free(&yaml);
    return pw_analysis_tell(call, analysis, status);
}

pw_status pw_analysis_model(const pw_call *call, pw_analysis *analysis)
{
    analysis->results.stage = &analysis->stage;
    pw_status status = pw_analog_build(&analysis->stage.analog, &analysis->results.analog, &analysis->messages);
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
    pw_target_free(&analysis->results.target);
    pw_messages_free(&analysis->messages);
    pw_stage_free(&analysis->stage);
}

void pw_say(const pw_text *text)
{
    fwrite(pw_text_string(text), 1, text->size, stdout);
}
