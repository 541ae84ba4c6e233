/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What an emitted header opens with: where it comes from and all that was found out about it. */
#include <complex.h>
#include <math.h>
#include <string.h>

#include "emit/emission.h"
#include "report/figures.h"
#include "report/phrases.h"
#include "report/rootgroups.h"

const char *pw_build_line(const pw_emission *e)
{
    const pw_target *t = e->target;
    const char *compiler = t->compiler && *t->compiler ? t->compiler : "cc";
    const char *flags = t->flags && *t->flags ? pw_arena_print(e->arena, " %s", t->flags) : "";
    const char *runtime = e->standalone ? "" : pw_arena_print(e->arena, " pw_%s.c", e->family);
    return pw_arena_print(e->arena, "%s%s -std=c99 -O2 -ffp-contract=off -c %s.c%s", compiler,
                          flags, e->stage, runtime);
}

/* "HEAD: " and what a phrase says. */
static void say(const pw_emission *e, pw_code *comment, const char *head,
                void (*phrase)(const pw_results *, pw_text *))
{
    pw_text text = {0};
    phrase(e->results, &text);
    pw_prose(comment, "%s: %s.", head, pw_text_string(&text));
    pw_text_free(&text);
}

static void origin(const pw_emission *e, pw_code *comment)
{
    const pw_stage *stage = e->results->stage;
    if (stage->about && *stage->about)
        pw_prose(comment, "%s: %s", e->stage, stage->about);
    else
        pw_prose(comment, "%s", e->stage);
    pw_prose(comment, "%s", "");
    pw_prose(comment, "Made by polewright %s from the stage file with SHA-256", PW_VERSION);
    pw_prose(comment, "  %s", stage->sha256);
    pw_prose(comment, "To make it again: polewright build STAGE.yaml, with the same --set values "
                      "where there were any.");
    pw_prose(comment, "Build: %s", pw_build_line(e));
    pw_prose(comment, "%s", "");
}

static void roots(pw_code *comment, const char *kind, const double complex *root, int n)
{
    pw_root_group group[PW_MAX_ROOTS];
    int groups = pw_group_roots(root, n, group);
    for (int i = 0; i < groups; i++) {
        const double complex r = group[i].root;
        char hz[PW_FIGURE_ROOM], times[24] = "";
        if (group[i].count > 1) snprintf(times, sizeof times, ", %d times", group[i].count);
        pw_figure(hz, cabs(r) / 6.283185307179586, "Hz");
        if (r == 0)
            pw_prose(comment, "  %s 0%s", kind, times);
        else if (cimag(r) == 0)
            pw_prose(comment, "  %s %.9g rad/s (%s)%s", kind, creal(r), hz, times);
        else
            pw_prose(comment, "  %s %.9g +- %.9gj rad/s (%s)%s", kind, creal(r), cimag(r), hz,
                     times);
    }
}

static void error_line(pw_code *comment, const char *what, const pw_error_peak *peak,
                       const char *unit)
{
    pw_text text = {0};
    pw_phrase_peak(peak, unit, &text);
    pw_prose(comment, "  %s: %s", what, pw_text_string(&text));
    pw_text_free(&text);
}

static void model(const pw_emission *e, pw_code *comment)
{
    const pw_results *results = e->results;
    const pw_response *response = &results->response;
    char rate[PW_FIGURE_ROOM], low[PW_FIGURE_ROOM], high[PW_FIGURE_ROOM];
    pw_text transform = {0};
    pw_prose(comment, "The analog stage, K prod(s - zero) / prod(s - pole), K = %.12Lg:",
             results->analog.factor);
    roots(comment, "pole", results->analog.pole, results->analog.poles);
    roots(comment, "zero", results->analog.zero, results->analog.zeros);
    pw_phrase_transform(&results->digital, &transform);
    pw_prose(comment, "Rate: %s. Transform: %s.", pw_figure(rate, results->stage->rate_hz, "Hz"),
             pw_text_string(&transform));
    pw_text_free(&transform);
    pw_prose(comment, "Largest error against the analog stage from %s to %s, words included:",
             pw_figure(low, response->band_hz[0], "Hz"),
             pw_figure(high, response->band_hz[1], "Hz"));
    error_line(comment, "magnitude", &response->total.magnitude_db, "dB");
    error_line(comment, "phase", &response->total.phase_deg, "deg");
    pw_prose(comment, "%s", "");
}

static void full_scale(const pw_emission *e, pw_code *comment)
{
    const pw_realisation *r = e->r;
    char in[PW_FIGURE_ROOM], out[PW_FIGURE_ROOM];
    const char *one = e->bits == 16   ? "1.0 is the word 2^15"
                      : e->bits == 32 ? "1.0 is the word 2^31"
                                      : "1.0";
    pw_prose(comment, "Full scale: %s, which stands for %s at the input and %s at the output.", one,
             pw_figure(in, r->input_full_scale, "V"), pw_figure(out, r->output_full_scale, "V"));
    if (r->input_peak < 1)
        pw_prose(
            comment,
            "Bounds are for inputs up to %.6g of full scale, the peak that the stage file gives.",
            r->input_peak);
}

static void bounds(const pw_emission *e, pw_code *comment)
{
    for (int i = 0; i < e->r->nodes; i++) {
        const pw_node *node = &e->r->node[i];
        if (node->integrates)
            pw_prose(comment,
                     "  %s: integrates; the worst input reaches the clamp after %.6g samples",
                     node->name, node->samples_to_clip);
        else
            pw_prose(comment, "  %s: at most %.6g of full scale (%.2f dB of room)%s", node->name,
                     node->bound, node->headroom_db, node->can_clip ? ", so it can clip" : "");
    }
}

void pw_story(const pw_emission *e, pw_code *comment)
{
    pw_text arithmetic = {0};
    origin(e, comment);
    model(e, comment);
    pw_phrase_arithmetic(e->r, &arithmetic);
    pw_prose(comment, "Arithmetic: %s.", pw_text_string(&arithmetic));
    pw_text_free(&arithmetic);
    full_scale(e, comment);
    say(e, comment, "Range", pw_phrase_range);
    bounds(e, comment);
    if (e->fixed) say(e, comment, "Noise", pw_phrase_noise);
    say(e, comment, "Cost on the target", pw_phrase_cost);
    pw_prose(comment, "%s", "");
    for (int i = 0; pw_cautions[i]; i++) pw_prose(comment, "%s", pw_cautions[i]);
}
