/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <limits.h>
#include <stdio.h>
#include <string.h>

#include "emit/emit.h"
#include "emit/vectors.h"
#include "report/html.h"
#include "report/json.h"
#include "report/text.h"
#include "base/files.h"
#include "verbs/analysis.h"

enum { NO_PLOTS };

static const pw_option options[] = {
    {"no-plots", NULL, "leave the plots out of report.html (faster)"},
    {NULL, NULL, NULL},
};

static pw_status compose(const pw_call *call, const pw_results *results, pw_fileset *files)
{
    pw_status status = pw_emit_c(results, files);
    if (!status) status = pw_emit_vectors(results, files);
    if (!status) status = pw_emit_selftest(results, files);
    if (status) return status;
    pw_report_text(results, false, true, pw_fileset_add(files, "report.txt"));
    pw_report_json(results, pw_fileset_add(files, "report.json"));
    return pw_report_html(results, !call->extra[NO_PLOTS], pw_fileset_add(files, "report.html"));
}

/* Vectors of signals that an earlier build of this stage wrote and this one did not would pass for
 * today's. The first line of each names its stage; those of another stage stay. */
static void remove_old_vectors(const pw_fileset *files, const char *directory, const char *stage)
{
    for (int i = 0; i < PW_SIGNALS; i++) {
        char name[64], path[PATH_MAX], line[256] = "", mark[128];
        snprintf(name, sizeof name, "vectors/%s.csv", pw_signal_word((pw_signal)i));
        if (pw_fileset_find(files, name)
            || snprintf(path, sizeof path, "%s/%s", directory, name) >= (int)sizeof path)
            continue;
        FILE *f = fopen(path, "r");
        if (!f) continue;
        bool ours = fgets(line, sizeof line, f) != NULL;
        fclose(f);
        snprintf(mark, sizeof mark, ", stage %s, rate ", stage);
        if (ours && !strncmp(line, "# polewright ", 13) && strstr(line, mark)) remove(path);
    }
}

static void summarise(const pw_call *call, const pw_results *results, const char *directory)
{
    pw_text out = {0};
    if (call->json) pw_report_json(results, &out);
    else if (!call->quiet) {
        pw_report_text(results, call->color, call->verbose, &out);
        pw_text_print(&out, "\nWritten to %s/: the C (%s.h, %s.c), its vectors and self-test, and report.html.\n",
                      directory, results->stage->name, results->stage->name);
    }
    pw_say(&out);
    pw_text_free(&out);
}

static pw_status run(const pw_call *call)
{
    static pw_analysis analysis;
    pw_fileset files = {0};
    pw_status status = pw_analysis_run(call, &analysis);
    if (!status) status = compose(call, &analysis.results, &files);
    if (!status) {
        const char *directory = pw_analysis_directory(call, &analysis);
        status = pw_fileset_write(&files, directory);
        if (!status) {
            remove_old_vectors(&files, directory, analysis.stage.name);
            summarise(call, &analysis.results, directory);
            status = pw_analysis_verdict(&analysis);
        }
    }
    pw_fileset_free(&files);
    pw_analysis_free(&analysis);
    return status;
}

const pw_verb pw_verb_build = {
    .name = "build", .summary = "write the C, its vectors, self-test, reports and plots into -o DIR",
    .run = run, .needs_stage = true, .option = options,
    .examples = "  polewright build stage.yaml\n"
                "  polewright build stage.yaml -o firmware/filter --target cortex-m4f\n"
                "  polewright build stage.yaml --set arithmetic.code=standalone\n",
};
