/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdio.h>

#include "base/files.h"
#include "emit/vectors.h"
#include "report/json.h"
#include "verbs/analysis.h"

static pw_status run(const pw_call *call)
{
    static pw_analysis analysis;
    pw_fileset files = {0};
    pw_status status = pw_analysis_results(call, &analysis);
    if (!status) status = pw_emit_vectors(&analysis.results, &files);
    if (!status) {
        const char *directory = pw_analysis_directory(call, &analysis);
        status = pw_fileset_write(&files, directory);
        if (!status && call->json) {
            pw_text out = {0};
            pw_report_json(&analysis.results, &out);
            pw_say(&out);
            pw_text_free(&out);
        } else if (!status && !call->quiet) {
            for (int i = 0; i < files.count; i++) printf("%s/%s\n", directory, files.list[i].name);
        }
        if (!status) status = pw_analysis_verdict(&analysis);
    }
    pw_fileset_free(&files);
    pw_analysis_free(&analysis);
    return status;
}

const pw_verb pw_verb_vectors = {
    .name = "vectors", .summary = "write only the test vectors, as CSV files in DIR/vectors",
    .run = run, .needs_stage = true,
    .examples = "  polewright vectors stage.yaml -o bench\n"
                "  polewright vectors stage.yaml --set vectors.signals=[sweep,noise] --set vectors.length=100000\n",
};
