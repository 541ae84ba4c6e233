/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "verbs/spread_shards.h"

#include <glob.h>
#include <inttypes.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>

#include "analog/spread.h"
#include "base/files.h"
#include "report/json_value.h"
#include "report/tolerance.h"
#include "verbs/analysis.h"

#define LARGEST_SHARD (256 << 20)
#define MOST_SHARDS 100000

/* ---- One share ---- */

static bool read_share(const char *text, int *shard, int *shards)
{
    int used = 0;
    return sscanf(text, "%d/%d%n", shard, shards, &used) == 2 && !text[used] && *shard >= 1
           && *shard <= *shards && *shards <= MOST_SHARDS;
}

static pw_status no_tolerances(const pw_analysis *analysis)
{
    fprintf(stderr, "%s: no part has a tolerance, so that nothing spreads; expected 'tolerance:' on a part\n",
            analysis->messages.file);
    return PW_WRONG;
}

static pw_status write_shard(const char *path, const struct pw_spread *spread)
{
    pw_text text = {0};
    pw_spread_write(spread, &text);
    pw_status status = pw_file_write(path, text.data, text.size);
    pw_text_free(&text);
    return status;
}

static pw_status draw_share(const pw_call *call, pw_analysis *analysis, int shard, int shards)
{
    const pw_spread_options options = {.shard = shard, .shards = shards, .quiet = call->quiet};
    pw_results *r = &analysis->results;
    pw_status status = pw_spread_compute(&analysis->stage, &r->analog, &options, &r->spread,
                                         &analysis->messages);
    status = pw_analysis_tell(call, analysis, status);
    if (status) return status;
    if (!r->spread) return no_tolerances(analysis);
    const char *path = call->directory;
    if (!path) path = pw_arena_print(&analysis->stage.arena, "%s.%d-of-%d.spread", analysis->stage.name,
                                     shard, shards);
    status = write_shard(path, r->spread);
    if (!status && !call->quiet)
        fprintf(stderr, "%s: draws %" PRId64 " to %" PRId64 " of %" PRId64 "\n", path,
                r->spread->done[0].from, r->spread->done[0].to, r->spread->draws);
    return status;
}

pw_status pw_spread_share(const pw_call *call, const char *share)
{
    static pw_analysis analysis;
    int shard, shards;
    if (!read_share(share, &shard, &shards)) {
        fprintf(stderr, "polewright: --shard %s is no share; expected I/N, such as 3/8\n", share);
        return PW_WRONG;
    }
    pw_status status = pw_analysis_read(call, &analysis);
    if (!status) status = pw_analysis_model(call, &analysis);
    if (!status) status = draw_share(call, &analysis, shard, shards);
    pw_analysis_free(&analysis);
    return status;
}

/* ---- All of them ---- */

static pw_status add_file(const char *path, struct pw_spread **all)
{
    pw_text text = {0};
    struct pw_spread *one = NULL;
    pw_status status = pw_file_read(path, LARGEST_SHARD, &text);
    if (!status) status = pw_spread_read(path, &text, &one);
    pw_text_free(&text);
    if (status) return status;
    if (!*all) {
        *all = one;
        return PW_OK;
    }
    status = pw_spread_merge(*all, one, path);
    pw_spread_free(one);
    return status;
}

static pw_status add_directory(const char *path, struct pw_spread **all)
{
    pw_text pattern = {0};
    glob_t found = {0};
    pw_status status = PW_OK;
    pw_text_print(&pattern, "%s/*.spread", path);
    if (glob(pw_text_string(&pattern), 0, NULL, &found) || !found.gl_pathc) {
        fprintf(stderr, "%s: holds no shard; expected files that end in .spread\n", path);
        status = PW_WRONG;
    }
    for (size_t i = 0; i < found.gl_pathc && !status; i++) status = add_file(found.gl_pathv[i], all);
    globfree(&found);
    pw_text_free(&pattern);
    return status;
}

static pw_status add_list(const char *from, struct pw_spread **all)
{
    pw_status status = PW_OK;
    char *list = pw_take(strlen(from) + 1), *rest;
    strcpy(list, from);
    for (char *name = strtok_r(list, ",", &rest); name && !status; name = strtok_r(NULL, ",", &rest))
        status = add_file(name, all);
    if (!status && !*all) {
        fputs("polewright: --merge needs a directory or files; expected such as --merge study\n", stderr);
        status = PW_WRONG;
    }
    free(list);
    return status;
}

/* The merged study must be that of this stage: its corners, which no draw decides, must agree. */
static pw_status check_stage(const pw_call *call, pw_analysis *analysis, const struct pw_spread *merged)
{
    struct pw_spread *own = NULL;
    const pw_spread_options options = {.shard = 1, .shards = MOST_SHARDS, .quiet = true};
    analysis->stage.spread.draws = 1;
    pw_status status = pw_spread_compute(&analysis->stage, &analysis->results.analog, &options, &own,
                                         &analysis->messages);
    status = pw_analysis_tell(call, analysis, status);
    if (!status && !own) status = no_tolerances(analysis);
    if (!status && (own->parts != merged->parts || !pw_spread_same_stage(own, merged))) {
        fprintf(stderr, "%s: the shards are of another stage; expected those that --shard wrote for this one, "
                "with the same --set\n", analysis->messages.file);
        status = PW_WRONG;
    }
    pw_spread_free(own);
    return status;
}

static void say(const pw_call *call, const pw_results *results)
{
    const pw_spread *s = results->spread;
    pw_text out = {0};
    if (call->json) pw_json_write(pw_json_spread(results), &out);
    else {
        pw_phrase_spread(results, &out);
        pw_text_add(&out, "\n");
        if (s->drawn < s->draws)
            pw_text_print(&out, "%" PRId64 " of %" PRId64 " draws are missing\n", s->draws - s->drawn, s->draws);
    }
    pw_say(&out);
    pw_text_free(&out);
}

static pw_status join(const pw_call *call, pw_analysis *analysis, const char *from)
{
    struct stat info;
    struct pw_spread **all = &analysis->results.spread;
    bool directory = !stat(from, &info) && S_ISDIR(info.st_mode);
    pw_status status = directory ? add_directory(from, all) : add_list(from, all);
    if (!status) status = check_stage(call, analysis, *all);
    if (!status && call->directory) status = write_shard(call->directory, *all);
    if (status) return status;
    say(call, &analysis->results);
    return (*all)->drawn < (*all)->draws ? PW_NOT_MET : PW_OK;
}

pw_status pw_spread_join(const pw_call *call, const char *from)
{
    static pw_analysis analysis;
    pw_status status = pw_analysis_results(call, &analysis);
    if (!status) status = join(call, &analysis, from);
    pw_analysis_free(&analysis);
    return status;
}
