/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/files.h"
#include "twin/play.h"
#include "twin/say.h"
#include "verbs/analysis.h"
#include "verbs/spread_shards.h"

enum { RECORD, RESPONSE, SAMPLES, PLAY, CALIBRATE, REFERENCE, HOLD, DRAWS, SEED, SHARD, MERGE };

static const pw_option options[] = {
    {"record", "FILE",
     "compare with a measured record: columns input,output, or a WAV file of two channels"},
    {"response", "FILE", "compare with a measured response: columns hz,db and perhaps deg"},
    {"samples", NULL, "a record holds the samples that the C sees, not volts"},
    {"play", "IN",
     "run the emitted arithmetic over the record IN and write what comes out to -o FILE"},
    {"calibrate", NULL,
     "fit the parts (or f0, q and gain of roots) and write a stage file with them"},
    {"reference", NULL, "with --record: set the exact analog stage beside the twin"},
    {"hold", "zero|linear", "the input of --reference between samples (default zero)"},
    {"draws", "N", "boards that are drawn for the envelope, as spread.draws"},
    {"seed", "N", "of the draws, as spread.seed"},
    {"shard", "I/N",
     "draw only share I of N of the tolerances; -o FILE takes it (default <stage>.I-of-N.spread)"},
    {"merge", "FILES", "join shards: a directory of *.spread files, or files divided by commas"},
    {NULL, NULL, NULL},
};

static pw_status wrong(const char *what)
{
    fprintf(stderr, "polewright: twin: %s (see: polewright twin --help)\n", what);
    return PW_WRONG;
}

/* ---- The command line ---- */

static pw_status check_task(const pw_call *call)
{
    const char *const *x = call->extra;
    int tasks = !!x[RECORD] + !!x[RESPONSE] + !!x[PLAY] + !!x[SHARD] + !!x[MERGE];
    if (tasks != 1)
        return wrong(
            "exactly one of --record, --response, --play, --shard and --merge is expected");
    if (x[REFERENCE] && !x[RECORD]) return wrong("--reference goes with --record");
    if (x[HOLD] && !x[REFERENCE]) return wrong("--hold goes with --reference");
    if (x[CALIBRATE] && !x[RECORD] && !x[RESPONSE])
        return wrong("--calibrate goes with --record or --response");
    if (x[SAMPLES] && !x[RECORD] && !x[PLAY])
        return wrong("--samples goes with --record or --play");
    if (x[PLAY] && !call->directory)
        return wrong("--play needs -o FILE, where the output goes (.csv or .wav)");
    return PW_OK;
}

static pw_status check_hold(const pw_call *call, pw_hold *hold)
{
    const char *word = call->extra[HOLD];
    *hold = !call->extra[REFERENCE]           ? PW_HOLD_NONE
            : word && !strcmp(word, "linear") ? PW_HOLD_LINEAR
                                              : PW_HOLD_ZERO;
    if (!word || !strcmp(word, "zero") || !strcmp(word, "linear")) return PW_OK;
    return wrong("--hold knows zero and linear");
}

/* The fitted values go into the text of the file: it must say what was fitted. */
static pw_status check_calibrate(const pw_call *call)
{
    if (!call->extra[CALIBRATE]) return PW_OK;
    if (!strcmp(call->stage, "-"))
        return wrong("--calibrate needs the stage file by name, not from standard input");
    for (int i = 0; i < call->sets; i++)
        if (!strncmp(call->set[i], "analog", 6))
            return wrong("--calibrate writes a new stage file; put what --set changes "
                         "in 'analog' into the file first");
    return PW_OK;
}

/* --draws and --seed as the --set options that they stand for. */
static pw_call with_draws(const pw_call *call, pw_arena *arena)
{
    static const struct {
        int extra;
        const char *path;
    } as_set[] = {{DRAWS, "spread.draws"}, {SEED, "spread.seed"}};
    pw_call with = *call;
    with.set = pw_arena_take(arena, (size_t)(call->sets + 2) * sizeof *with.set);
    for (int i = 0; i < call->sets; i++) with.set[i] = call->set[i];
    for (int i = 0; i < 2; i++)
        if (call->extra[as_set[i].extra])
            with.set[with.sets++] =
                pw_arena_print(arena, "%s=%s", as_set[i].path, call->extra[as_set[i].extra]);
    return with;
}

/* ---- Tasks ---- */

static pw_status play(const pw_call *call, const pw_results *results)
{
    pw_play play = {.in = call->extra[PLAY],
                    .out = call->directory,
                    .samples = call->extra[SAMPLES],
                    .quiet = call->quiet};
    pw_text out = {0};
    pw_status status = pw_play_run(results, &play);
    if (!status && (call->json || !call->quiet)) pw_play_say(results, &play, call->json, &out);
    pw_say(&out);
    pw_text_free(&out);
    return status;
}

/* <stage>.fitted.yaml beside the stage file. */
static const char *fitted_path(const pw_call *call, pw_arena *arena)
{
    const char *slash = strrchr(call->stage, '/'), *name = slash ? slash + 1 : call->stage,
               *dot = strrchr(name, '.');
    size_t n = dot && dot > name ? (size_t)(dot - call->stage) : strlen(call->stage);
    return call->directory ? call->directory
                           : pw_arena_print(arena, "%.*s.fitted.yaml", (int)n, call->stage);
}

/* One fit; *model: of the stage file as it leaves it in *edited. */
static pw_status fit_once(const pw_call *call, pw_analysis *analysis, const pw_twin_found *found,
                          pw_arena *arena, pw_fit *fit, pw_text *edited, pw_roots *model)
{
    bool delay = found->comparison != NULL;
    pw_text_free(edited);
    pw_status status =
        pw_fit_run(&analysis->results, found->points, delay, arena, fit, &analysis->messages);
    if (!status) status = pw_fit_edit(call->stage, fit, edited);
    return status ? status : pw_fit_model(call->stage, edited, model);
}

/* A record's response is estimated again with the fitted model for the board's, then fitted again:
 * what the window smears cancels the better the nearer the model is. */
static pw_status fit_all(const pw_call *call, pw_analysis *analysis, pw_twin_found *found,
                         pw_arena *arena, pw_fit *fit, pw_text *edited, pw_comparison *comparison)
{
    pw_roots model;
    pw_points first = *found->points;
    pw_status status = fit_once(call, analysis, found, arena, fit, edited, &model);
    double before = fit->before_db;
    for (int round = 0; round < 2 && found->comparison && !status; round++) {
        pw_compare_again(&analysis->results, &model, arena, comparison);
        status = fit_once(call, analysis, found, arena, fit, edited, &model);
    }
    fit->before_db = before;
    if (found->comparison) {
        fit->delay_s += comparison->delay_samples / analysis->stage.rate_hz;
        comparison->points = first;
    }
    return status;
}

static pw_status calibrate(const pw_call *call, pw_analysis *analysis, pw_arena *arena,
                           pw_twin_found *found, pw_fit *fit, pw_comparison *comparison)
{
    pw_text edited = {0};
    pw_status status = fit_all(call, analysis, found, arena, fit, &edited, comparison);
    found->fit = fit;
    found->written = fitted_path(call, arena);
    if (!status) status = pw_file_write(found->written, pw_text_string(&edited), edited.size);
    pw_text_free(&edited);
    return status;
}

static pw_status measure(const pw_call *call, pw_analysis *analysis, pw_hold hold, pw_arena *arena,
                         pw_twin_found *found, pw_comparison *comparison, pw_points *points)
{
    pw_flow flow;
    if (call->extra[RESPONSE]) {
        found->points = points;
        return pw_compare_response(&analysis->results, call->extra[RESPONSE], call->quiet, arena,
                                   points, &analysis->messages);
    }
    found->comparison = comparison;
    found->points = &comparison->points;
    pw_status status = pw_flow_open(&analysis->results, call->extra[RECORD], call->extra[SAMPLES],
                                    call->quiet, &flow);
    if (!status) status = pw_compare_record(&flow, hold, arena, comparison, &analysis->messages);
    pw_flow_close(&flow);
    return status;
}

static pw_status compare(const pw_call *call, pw_analysis *analysis, pw_hold hold)
{
    static pw_comparison comparison;
    static pw_points points;
    static pw_fit fit;
    pw_arena arena = {0};
    pw_text out = {0};
    pw_twin_found found = {.results = &analysis->results};
    pw_status status = measure(call, analysis, hold, &arena, &found, &comparison, &points);
    if (!status && call->extra[CALIBRATE])
        status = calibrate(call, analysis, &arena, &found, &fit, &comparison);
    status = pw_analysis_tell(call, analysis, status);
    if (!status) {
        if (call->json) pw_twin_json(&found, &out);
        else if (!call->quiet) pw_twin_text(&found, call->verbose, &out);
        if (found.points->judged && !found.points->agrees) status = PW_NOT_MET;
    }
    pw_say(&out);
    pw_text_free(&out);
    pw_arena_free(&arena);
    return status;
}

static pw_status measured(const pw_call *call, pw_analysis *analysis, pw_hold hold)
{
    pw_status status = pw_analysis_results(call, analysis);
    if (status) return status;
    return call->extra[PLAY] ? play(call, &analysis->results) : compare(call, analysis, hold);
}

static pw_status run(const pw_call *call)
{
    static pw_analysis analysis;
    pw_arena arena = {0};
    pw_hold hold;
    pw_call with = with_draws(call, &arena);
    pw_status status = check_task(call);
    if (!status) status = check_hold(call, &hold);
    if (!status) status = check_calibrate(call);
    if (!status && call->extra[SHARD]) status = pw_spread_share(&with, call->extra[SHARD]);
    else if (!status && call->extra[MERGE]) status = pw_spread_join(&with, call->extra[MERGE]);
    else if (!status) status = measured(&with, &analysis, hold);
    pw_analysis_free(&analysis);
    pw_arena_free(&arena);
    return status;
}

const pw_verb pw_verb_twin = {
    .name = "twin",
    .summary = "run the stage over a measured record or response, compare, and fit the parts",
    .run = run,
    .needs_stage = true,
    .option = options,
    .examples = "  polewright twin stage.yaml --record bench.csv\n"
                "  polewright twin stage.yaml --record bench.wav --reference --hold linear\n"
                "  polewright twin stage.yaml --response analyser.csv --calibrate -o board7.yaml\n"
                "  polewright twin stage.yaml --play in.csv -o out.csv\n"
                "  polewright twin stage.yaml --shard 3/8 -o study/3.spread\n"
                "  polewright twin stage.yaml --merge study\n",
};
