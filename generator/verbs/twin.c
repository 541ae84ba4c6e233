/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdio.h>

#include "twin/play.h"
#include "verbs/analysis.h"
#include "verbs/spread_shards.h"

enum { PLAY, SAMPLES, SHARD, MERGE };

static const pw_option options[] = {
    {"play", "IN", "run the emitted arithmetic over the record IN and write what comes out to -o FILE"},
    {"samples", NULL, "the record holds the samples that the C sees, not volts"},
    {"shard", "I/N", "draw only share I of N of the tolerances; -o FILE takes it (default <stage>.I-of-N.spread)"},
    {"merge", "FILES", "join shards: a directory of *.spread files, or files divided by commas"},
    {NULL, NULL, NULL},
};

static pw_status play(const pw_call *call, const pw_results *results)
{
    pw_play play = {.in = call->extra[PLAY], .out = call->directory, .samples = call->extra[SAMPLES],
                    .quiet = call->quiet};
    if (!play.out) {
        fputs("polewright: --play needs -o FILE: where the output goes (.csv or .wav)\n", stderr);
        return PW_WRONG;
    }
    pw_text out = {0};
    pw_status status = pw_play_run(results, &play);
    if (!status && (call->json || !call->quiet)) pw_play_say(results, &play, call->json, &out);
    pw_say(&out);
    pw_text_free(&out);
    return status;
}

static pw_status run(const pw_call *call)
{
    static pw_analysis analysis;
    if (call->extra[SHARD]) return pw_spread_share(call, call->extra[SHARD]);
    if (call->extra[MERGE]) return pw_spread_join(call, call->extra[MERGE]);
    pw_status status = pw_analysis_run(call, &analysis);
    if (!status) status = play(call, &analysis.results);
    pw_analysis_free(&analysis);
    return status;
}

const pw_verb pw_verb_twin = {
    .name = "twin", .summary = "run the stage over a measured record or response, compare, and fit the parts",
    .run = run, .needs_stage = true, .option = options,
    .examples = "  polewright twin stage.yaml --shard 3/8 -o study/3.spread\n"
                "  polewright twin stage.yaml --merge study\n"
                "  polewright twin stage.yaml --play in.csv -o out.csv\n",
};
