/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdio.h>
#include <string.h>

#include "analog/cell.h"
#include "analog/sensitivity.h"
#include "report/show.h"
#include "verbs/analysis.h"

enum { PLOT, CELLS };

#define SCREEN 40                /* lines */

static const pw_option options[] = {
    {"plot", NULL, "add a small plot of the magnitude"},
    {"cells", NULL, "list the textbook cells with their parts and a small diagram of each"},
    {NULL, NULL, NULL},
};

static pw_status list_cells(void)
{
    pw_text out = {0};
    pw_cells_list(&out);
    pw_say(&out);
    pw_text_free(&out);
    return PW_OK;
}

static int lines_of(const pw_text *text)
{
    int n = 0;
    for (const char *p = pw_text_string(text); *p; p++) n += *p == '\n';
    return n;
}

/* Adds what the schematic says. The tables of a large one would push the rest off the screen: then
 * only its first lines, up to the tables, and how to see them. */
static void add_circuit(const pw_call *call, const pw_stage *stage, pw_text *out)
{
    pw_text circuit = {0};
    pw_circuit_show(stage, &circuit);
    const char *tables = strstr(pw_text_string(&circuit), "  sensitivity to each part");
    if (tables && !call->verbose && lines_of(out) + lines_of(&circuit) > SCREEN) {
        pw_text_add_bytes(out, pw_text_string(&circuit), (size_t)(tables - pw_text_string(&circuit)));
        pw_text_add(out, "  how far each part moves poles, zeros and gain: add --verbose\n");
    } else pw_text_add(out, pw_text_string(&circuit));
    pw_text_free(&circuit);
}

static pw_status run(const pw_call *call)
{
    static pw_analysis analysis;
    if (call->extra[CELLS]) return list_cells();
    if (!call->stage) {
        fputs("polewright: show needs a stage file: polewright show STAGE.yaml\n", stderr);
        return PW_WRONG;
    }
    pw_status status = pw_analysis_read(call, &analysis);
    if (!status) status = pw_analysis_model(call, &analysis);
    if (!status) {
        pw_text out = {0};
        if (call->json) pw_show_json(&analysis.stage, &analysis.results.analog, &out);
        else {
            pw_show_text(&analysis.stage, &analysis.results.analog, call->extra[PLOT], call->color, &out);
            add_circuit(call, &analysis.stage, &out);
        }
        pw_say(&out);
        pw_text_free(&out);
    }
    pw_analysis_free(&analysis);
    return status;
}

const pw_verb pw_verb_show = {
    .name = "show", .summary = "print the analog model: poles, zeros, gain and a table of the response; writes nothing",
    .run = run, .takes_stage = true, .option = options,
    .examples = "  polewright show stage.yaml\n"
                "  polewright show stage.yaml --plot\n"
                "  polewright show --cells\n",
};
