/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/text_full.h"

#include <math.h>
#include <string.h>

#include "report/figures.h"
#include "report/nodes.h"
#include "report/phrases.h"
#include "report/rootgroups.h"
#include "report/table.h"
#include "report/tolerance.h"

#define WIDTH 100             /* columns */

static void put_heading(const char *name, const pw_style *style, pw_text *out)
{
    pw_text_print(out, "\n%s%s%s\n", style->strong, name, style->plain);
}

/* A paragraph, indented by two. */
static void put_paragraph(pw_text *body, pw_text *out)
{
    if (body->size) {
        pw_text_add(out, "  ");
        pw_text_wrap(pw_text_string(body), 2, WIDTH, out);
    }
    pw_text_free(body);
}

static void put_sentence(const char *sentence, pw_text *out)
{
    pw_text body = {0};
    pw_text_add(&body, sentence ? sentence : "");
    put_paragraph(&body, out);
}

typedef void phrase(const pw_results *results, pw_text *out);

static void put_phrase(phrase *say, const pw_results *results, pw_text *out)
{
    pw_text body = {0};
    say(results, &body);
    put_paragraph(&body, out);
}

/* ---- transform and errors ---- */

static void put_candidates(const pw_digital *digital, pw_text *out)
{
    pw_table table = {.align = "llrr"};
    const char *const head[] = {"tried", "", "magnitude error", "phase error"};
    const char *const unit[] = {"dB", "deg"};
    for (int i = 0; i < 4; i++) pw_table_cell(&table, "%s", head[i]);
    for (int i = 0; i < digital->candidates; i++) {
        const pw_candidate *c = &digital->candidate[i];
        char figure[PW_FIGURE_ROOM];
        pw_text how = {0};
        pw_phrase_candidate(c, &how);
        pw_table_cell(&table, "%s", pw_method_word(c->method));
        pw_table_cell(&table, "%s", pw_text_string(&how));
        const double error[] = {c->magnitude_error_db, c->phase_error_deg};
        for (int k = 0; k < 2; k++)
            pw_table_cell(&table, "%s", c->possible ? pw_figure(figure, error[k], unit[k]) : "");
        pw_text_free(&how);
    }
    pw_table_print(&table, 2, out);
}

static void put_transform(const pw_results *results, pw_text *out)
{
    pw_text body = {0};
    pw_phrase_transform(&results->digital, &body);
    if (results->digital.candidates > 1) pw_text_add(&body, "; ");
    pw_phrase_choice(&results->digital, &body);
    put_paragraph(&body, out);
}

static void add_error_row(pw_table *table, const char *name, const pw_error_figures *e)
{
    const pw_error_peak *peak[] = {&e->magnitude_db, &e->phase_deg, &e->delay_s};
    const char *const unit[] = {"dB", "deg", "s"};
    pw_table_cell(table, "%s", name);
    for (int i = 0; i < 3; i++) {
        pw_text cell = {0};
        pw_phrase_peak(peak[i], unit[i], &cell);
        pw_table_cell(table, "%s", pw_text_string(&cell));
        pw_text_free(&cell);
    }
}

static void put_errors(const pw_results *results, pw_text *out)
{
    const pw_response *r = &results->response;
    char low[PW_FIGURE_ROOM], high[PW_FIGURE_ROOM];
    pw_figure(low, r->band_hz[0], "Hz");
    pw_figure(high, r->band_hz[1], "Hz");
    pw_text_print(out, "  Largest from %s to %s, where the analog magnitude is within %g dB of its"
                  " peak:\n", low, high, results->stage->limits.floor_db);
    pw_table table = {.align = "llll"};
    const char *const head[] = {"", "magnitude", "phase", "group delay"};
    for (int i = 0; i < 4; i++) pw_table_cell(&table, "%s", head[i]);
    add_error_row(&table, "transform", &r->transform);
    add_error_row(&table, "words", &r->quantisation);
    add_error_row(&table, "both", &r->total);
    pw_table_print(&table, 2, out);
}

/* ---- roots ---- */

static void add_roots(const char *kind, const double complex *root, int n, const char *unit,
                      pw_table *table)
{
    pw_root_group group[PW_MAX_ROOTS];
    int groups = pw_group_roots(root, n, group);
    for (int i = 0; i < groups; i++) {
        const double complex r = group[i].root;
        pw_table_cell(table, "%s", kind);
        if (cimag(r) == 0) pw_table_cell(table, "%.9g%s", creal(r), unit);
        else pw_table_cell(table, "%.9g \302\261 %.9gj%s", creal(r), cimag(r), unit);
        pw_table_cell(table, group[i].count > 1 ? "%d times" : "", group[i].count);
    }
}

static void put_roots(const pw_roots *model, const char *unit, pw_text *out)
{
    pw_table table = {.align = "lll"};
    add_roots("pole", model->pole, model->poles, unit, &table);
    add_roots("zero", model->zero, model->zeros, unit, &table);
    pw_table_cell(&table, "factor");
    pw_table_cell(&table, "%.12Lg", model->factor);
    pw_table_cell(&table, "%s", "");
    pw_table_print(&table, 2, out);
}

/* ---- range ---- */

static void put_nodes(const pw_results *results, pw_text *out)
{
    const pw_realisation *r = &results->realisation;
    pw_table table = {.align = PW_NODE_ALIGN};
    if (!r->nodes) return;
    pw_node_head(&table);
    for (int i = 0; i < r->nodes; i++) pw_node_row(results, &r->node[i], &table);
    pw_table_print(&table, 2, out);
    for (int i = 0; i < r->nodes; i++) {
        pw_text body = {0};
        if (!r->node[i].integrates) continue;
        pw_phrase_integrator(results, &r->node[i], &body);
        put_paragraph(&body, out);
    }
}

/* ---- words ---- */

static void put_direct(const pw_words *w, pw_text *out)
{
    pw_table table = {.align = "lrll"};
    for (int k = 0; k <= w->order; k++) {
        pw_table_cell(&table, "b%d", k);
        pw_table_cell(&table, "%d", w->b[k]);
        pw_table_cell(&table, "\303\227 2^-%d", w->b_fraction);
        pw_table_cell(&table, "%.12g", w->realised_b[k]);
    }
    for (int k = 1; k <= w->order; k++) {
        pw_table_cell(&table, "a%d", k);
        pw_table_cell(&table, "%d", w->a[k]);
        pw_table_cell(&table, "\303\227 2^-%d", w->a_fraction);
        pw_table_cell(&table, "%.12g", w->realised_a[k]);
    }
    pw_table_print(&table, 4, out);
    if (w->structure == PW_DIRECT_1_SHAPED)
        pw_text_print(out, "    error feedback k1 %d, k2 %d\n", w->k1, w->k2);
}

static void put_coupled(const pw_words *w, pw_text *out)
{
    const struct { const char *name; int32_t word; int fraction; } row[] = {
        {"sigma", w->sigma, w->a_fraction}, {"omega", w->omega, w->a_fraction},
        {"g", w->g, w->a_fraction}, {"c1", w->c1, w->c_fraction}, {"c2", w->c2, w->c_fraction},
        {"d", w->d, w->c_fraction}};
    pw_table table = {.align = "lrll"};
    for (size_t i = 0; i < sizeof row / sizeof *row; i++) {
        pw_table_cell(&table, "%s", row[i].name);
        pw_table_cell(&table, "%d", row[i].word);
        pw_table_cell(&table, "\303\227 2^-%d", row[i].fraction);
        pw_table_cell(&table, "%.12g", ldexp(row[i].word, -row[i].fraction));
    }
    pw_table_print(&table, 4, out);
}

static void put_floats(const pw_words *w, pw_text *out)
{
    pw_table table = {.align = "ll"};
    for (int k = 0; k <= w->order; k++) {
        pw_table_cell(&table, "b%d", k);
        pw_table_cell(&table, "%.17g", w->fb[k]);
    }
    for (int k = 1; k <= w->order; k++) {
        pw_table_cell(&table, "a%d", k);
        pw_table_cell(&table, "%.17g", w->fa[k]);
    }
    pw_table_print(&table, 4, out);
}

static void put_arithmetic(const pw_realisation *r, pw_text *out)
{
    pw_text body = {0};
    pw_phrase_arithmetic(r, &body);
    put_paragraph(&body, out);
}

static void put_words(const pw_realisation *r, pw_text *out)
{
    for (int i = 0; i < r->count; i++) {
        const pw_words *w = &r->section[i];
        pw_text_print(out, "  section %d, %s, order %d%s", i + 1, pw_structure_word(w->structure),
                      w->order, w->cannot_clip ? "; cannot clip, so no clamp" : "");
        if (pw_is_fixed(r)) pw_text_print(out, "; %d-bit accumulator", w->fits_32 ? 32 : 64);
        pw_text_add(out, "\n");
        if (!pw_is_fixed(r)) put_floats(w, out);
        else if (w->structure == PW_COUPLED) put_coupled(w, out);
        else put_direct(w, out);
    }
}

/* ---- the end ---- */

static void put_defaults(const pw_stage *stage, pw_text *out)
{
    pw_text body = {0};
    for (const char *const *d = stage->taken; d && *d; d++)
        pw_text_print(&body, "%s%s", d == stage->taken ? "" : "; ", *d);
    if (!body.size) pw_text_add(&body, "none");
    put_paragraph(&body, out);
}

static void put_noise(const pw_results *results, pw_text *out)
{
    const pw_noise *n = &results->realisation.noise;
    put_phrase(pw_phrase_noise, results, out);
    if (n->given && isfinite(n->input_quantisation_rms_lsb))
        pw_text_print(out, "  The input's own rounding adds %.3g LSB rms at the output.\n",
                      n->input_quantisation_rms_lsb);
}

static void put_origin(const pw_stage *stage, pw_text *out)
{
    pw_text_print(out, "  polewright %s, from a stage file with SHA-256\n  %s.\n"
                  "  Make it again with: polewright build %s.yaml\n", PW_VERSION, stage->sha256,
                  stage->name);
}

void pw_report_text_full(const pw_results *results, const pw_style *style, pw_text *out)
{
    const pw_realisation *r = &results->realisation;
    put_sentence(results->stage->about, out);
    put_phrase(pw_phrase_stage, results, out);
    put_heading("Analog roots", style, out);
    put_roots(&results->analog, " rad/s", out);
    put_heading("Transform", style, out);
    put_transform(results, out);
    put_candidates(&results->digital, out);
    put_heading("Digital roots", style, out);
    put_roots(&results->digital.z, "", out);
    put_heading("Errors", style, out);
    put_errors(results, out);
    if (results->spread) {
        put_heading("Tolerances", style, out);
        put_phrase(pw_phrase_spread, results, out);
    }
    put_heading("Range", style, out);
    put_phrase(pw_phrase_range, results, out);
    put_nodes(results, out);
    put_heading("Words", style, out);
    put_arithmetic(r, out);
    put_sentence(r->structure_why, out);
    put_sentence(r->order_why, out);
    put_words(r, out);
    put_heading("Noise", style, out);
    put_noise(results, out);
    put_heading("Limit cycles", style, out);
    put_phrase(pw_phrase_limit_cycle, results, out);
    put_heading("Cost", style, out);
    put_phrase(pw_phrase_cost, results, out);
    put_heading("Defaults taken", style, out);
    put_defaults(results->stage, out);
    put_heading("Cautions", style, out);
    for (const char *const *c = pw_cautions; *c; c++) put_sentence(*c, out);
    put_heading("Origin", style, out);
    put_origin(results->stage, out);
}
