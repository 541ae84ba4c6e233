/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The sections of report.html without plots. */
#include "report/html_parts.h"

#include <ctype.h>
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "report/figures.h"
#include "report/nodes.h"
#include "report/phrases.h"
#include "report/rootgroups.h"

void pw_html_text(const char *text, pw_text *out)
{
    for (; text && *text; text++) {
        if (*text == '&') pw_text_add(out, "&amp;");
        else if (*text == '<') pw_text_add(out, "&lt;");
        else if (*text == '>') pw_text_add(out, "&gt;");
        else if (*text == '"') pw_text_add(out, "&quot;");
        else pw_text_add_bytes(out, text, 1);
    }
}

static void put_sentence(const char *text, pw_text *out)
{
    if (!text || !*text) return;
    char first[2] = {(char)toupper((unsigned char)*text), 0};
    size_t n = strlen(text);
    pw_text_add(out, "<p>");
    pw_html_text(first, out);
    pw_html_text(text + 1, out);
    pw_text_print(out, "%s</p>\n", strchr(".!?", text[n - 1]) ? "" : ".");
}

void pw_html_sentence(pw_html_phrase *say, const pw_results *results, pw_text *out)
{
    pw_text body = {0};
    say(results, &body);
    put_sentence(pw_text_string(&body), out);
    pw_text_free(&body);
}

void pw_html_open(const char *id, const char *heading, pw_text *out)
{
    pw_text_print(out, "<section aria-labelledby=\"h-%s\">\n<h2 id=\"h-%s\">%s</h2>\n<div>\n", id,
                  id,
                  heading);
}

void pw_html_close(pw_text *out)
{
    pw_text_add(out, "</div>\n</section>\n");
}

/* ---- verdict ---- */

/* How much of what is allowed is used, as a bar; nothing where a share means nothing. */
static void put_share(const pw_limit_row *row, pw_text *out)
{
    bool floor = !strcmp(row->name, "noise");
    double share = floor ? row->limit / row->value : row->value / row->limit;
    pw_text_add(out, "<td class=\"share\">");
    if (row->limit > 0 && isfinite(share) && share >= 0)
        pw_text_print(out, "<span class=\"bar%s\"><i style=\"width:%.1f%%\"></i></span>"
                      "<span class=\"pc\">%s%.0f %%</span>", row->met ? "" : " over",
                      fmin(share, 1) * 100, share > 9.99 ? "over " : "", fmin(share, 9.99) * 100);
    pw_text_add(out, "</td>");
}

static void put_limit(const pw_results *results, const pw_limit_row *row, pw_text *out)
{
    pw_text name = {0}, asked = {0}, found = {0};
    pw_phrase_limit(results, row, &name, &asked, &found);
    pw_text_print(out, "<tr><td><span class=\"tag %s\">%s</span></td><th scope=\"row\">",
                  row->met ? "met" : "fail", row->met ? "met" : "not met");
    pw_html_text(pw_text_string(&name), out);
    pw_text_add(out, "</th><td>");
    pw_html_text(pw_text_string(&asked), out);
    pw_text_add(out, "</td><td>");
    pw_html_text(pw_text_string(&found), out);
    pw_text_add(out, "</td>");
    put_share(row, out);
    pw_text_add(out, "</tr>\n");
    pw_text_free(&name);
    pw_text_free(&asked);
    pw_text_free(&found);
}

void pw_html_verdict(const pw_results *results, pw_text *out)
{
    const char *kind = !results->limits ? "open" : results->met ? "met" : "fail";
    const char *met = results->met ? "\342\234\223" : "\342\234\227";
    const char *sign = results->limits ? met : "\342\200\223";
    pw_text verdict = {0};
    pw_phrase_verdict(results, &verdict);
    pw_text_add(out, "<header>\n<h1>");
    pw_html_text(results->stage->name, out);
    pw_text_print(out, "</h1>\n<p class=\"about\">");
    pw_html_text(results->stage->about, out);
    pw_text_print(out,
                  "</p>\n<p class=\"verdict %s\"><span class=\"sign\" aria-hidden=\"true\">%s"
                  "</span>",
                  kind, sign);
    pw_html_text(pw_text_string(&verdict), out);
    pw_text_add(out, "</p>\n");
    pw_text_free(&verdict);
    if (results->limits) {
        pw_text_add(out, "<div class=\"wide\" role=\"group\" aria-label=\"Limits\" tabindex=\"0\">"
                    "<table class=\"limits\"><thead><tr><th scope=\"col\">verdict</th><th"
                    " scope=\"col\">limit</th>"
                    "<th scope=\"col\">asked</th><th scope=\"col\">found</th>"
                    "<th scope=\"col\">used of the limit</th></tr></thead>\n<tbody>\n");
        for (int i = 0; i < results->limits; i++) put_limit(results, &results->limit[i], out);
        pw_text_add(out, "</tbody></table></div>\n");
    }
    pw_text_add(out, "</header>\n");
}

/* ---- stage and roots ---- */

static void put_fact(const char *name, const char *value, pw_text *out)
{
    pw_text_print(out, "<div><dt>%s</dt><dd>", name);
    pw_html_text(value, out);
    pw_text_add(out, "</dd></div>\n");
}

static void put_transform(const pw_results *results, pw_text *out)
{
    pw_text body = {0};
    pw_phrase_transform(&results->digital, &body);
    put_fact("transform", pw_text_string(&body), out);
    pw_text_free(&body);
}

static void put_arithmetic(const pw_realisation *r, pw_text *out)
{
    char words[PW_FIGURE_ROOM];
    if (!pw_is_fixed(r)) {
        put_fact("samples", pw_sample_word(r->sample), out);
        return;
    }
    snprintf(words, sizeof words, "%s, %d-bit coefficients", pw_sample_word(r->sample),
             r->coefficient_bits);
    put_fact("samples", words, out);
    put_fact("scaling", pw_scaling_word(r->scaling), out);
    put_fact("rounding", r->truncate ? "truncates" : "to nearest", out);
    put_fact("overflow", r->wrap ? "wraps" : "saturates", out);
}

void pw_html_stage(const pw_results *results, pw_text *out)
{
    const pw_realisation *r = &results->realisation;
    char figure[PW_FIGURE_ROOM];
    pw_html_open("stage", "Stage", out);
    pw_html_sentence(pw_phrase_stage, results, out);
    pw_text_add(out, "<dl class=\"facts\">\n");
    put_fact("sample rate", pw_figure(figure, results->stage->rate_hz, "Hz"), out);
    put_transform(results, out);
    put_arithmetic(r, out);
    put_fact("full scale in", pw_figure(figure, r->input_full_scale, "V"), out);
    put_fact("largest input", pw_figure(figure, r->input_peak * r->input_full_scale, "V"), out);
    put_fact("full scale out", pw_figure(figure, r->output_full_scale, "V"), out);
    pw_text_add(out, "</dl>\n");
    pw_html_close(out);
}

static void put_roots(const char *plane, const char *kind, const double complex *root, int n,
                      pw_text *out)
{
    pw_root_group group[PW_MAX_ROOTS];
    int groups = pw_group_roots(root, n, group);
    for (int i = 0; i < groups; i++) {
        double complex r = group[i].root;
        pw_text_print(out, "<tr><td>%s</td><td>%s</td><td class=\"n\">", plane, kind);
        if (cimag(r) == 0) pw_text_print(out, "%.9g", creal(r));
        else pw_text_print(out, "%.9g \302\261 %.9gj", creal(r), cimag(r));
        pw_text_print(out, "</td><td class=\"n\">%d</td></tr>\n", group[i].count);
    }
}

void pw_html_roots(const pw_results *results, pw_text *out)
{
    const pw_roots *s = &results->analog, *z = &results->digital.z;
    pw_text_add(out, "<details><summary>Every root</summary>\n<div class=\"wide\" role=\"group\""
                " aria-label=\"Roots\" tabindex=\"0\"><table><thead><tr><th scope=\"col\">plane"
                "</th>"
                "<th scope=\"col\">kind</th><th scope=\"col\">root (s: rad/s)</th>"
                "<th scope=\"col\">times</th></tr></thead>\n<tbody>\n");
    put_roots("s", "pole", s->pole, s->poles, out);
    put_roots("s", "zero", s->zero, s->zeros, out);
    put_roots("z", "pole", z->pole, z->poles, out);
    put_roots("z", "zero", z->zero, z->zeros, out);
    pw_text_print(out,
                  "</tbody></table></div>\n<p>Factors: %.12Lg (s), %.12Lg (z).</p></details>\n",
                  s->factor, z->factor);
}

/* ---- range ---- */

static void put_node(const pw_results *results, const pw_node *n, pw_text *out)
{
    char fate[PW_FIGURE_ROOM];
    double share = isfinite(n->bound) ? n->bound : 1;
    bool fixed = pw_is_fixed(&results->realisation), known = fixed && isfinite(n->headroom_db);
    pw_text_print(out, "<tr><th scope=\"row\">%s</th><td>%s</td><td class=\"share\">"
                  "<span class=\"bar%s\"><i style=\"width:%.1f%%\"></i></span></td><td"
                  " class=\"n\">",
                  n->name, pw_node_fate(results, n, fate), n->can_clip ? " over" : "",
                  fmin(share, 1) * 100);
    pw_text_print(out, isfinite(n->bound) ? "%.6f" : "unbounded", n->bound);
    pw_text_add(out, "</td><td class=\"n\">");
    if (known) pw_text_print(out, "%.2f dB", n->headroom_db);
    pw_text_add(out, "</td><td class=\"n\">");
    if (known) pw_text_print(out, "%.2f", n->headroom_db / (20 * log10(2)));
    pw_text_add(out, "</td></tr>\n");
}

void pw_html_range(const pw_results *results, pw_text *out)
{
    const pw_realisation *r = &results->realisation;
    pw_html_open("range", "Range", out);
    pw_html_sentence(pw_phrase_range, results, out);
    if (r->nodes) {
        pw_text_add(out, "<div class=\"wide\" role=\"group\" aria-label=\"Nodes\" tabindex=\"0\">"
                    "<table><caption>Proved bound of each node for the largest input; a full bar is"
                    " full scale</caption>\n<thead><tr><th scope=\"col\">node</th>"
                    "<th scope=\"col\">clips</th><th scope=\"col\">share of full scale</th>"
                    "<th scope=\"col\">bound</th><th scope=\"col\">headroom</th>"
                    "<th scope=\"col\">bits</th></tr></thead>\n<tbody>\n");
        for (int i = 0; i < r->nodes; i++) put_node(results, &r->node[i], out);
        pw_text_add(out, "</tbody></table></div>\n");
    }
    for (int i = 0; i < r->nodes; i++) {
        pw_text body = {0};
        if (!r->node[i].integrates) continue;
        pw_phrase_integrator(results, &r->node[i], &body);
        put_sentence(pw_text_string(&body), out);
        pw_text_free(&body);
    }
    pw_html_close(out);
}

/* ---- words ---- */

typedef struct word_row { const char *name; double word; int fraction; double value; } word_row;

#define MOST_WORDS 8

static int direct_rows(const pw_words *w, bool fixed, word_row *row)
{
    static const char *const b[] = {"b0", "b1", "b2"}, *const a[] = {"a0", "a1", "a2"};
    static const char *const k[] = {"k1", "k2"};
    const int32_t feedback[] = {w->k1, w->k2};
    int n = 0;
    for (int i = 0; i <= w->order; i++)
        row[n++] = (word_row){b[i], w->b[i], w->b_fraction, fixed ? w->realised_b[i] : w->fb[i]};
    for (int i = 1; i <= w->order; i++)
        row[n++] = (word_row){a[i], w->a[i], w->a_fraction, fixed ? w->realised_a[i] : w->fa[i]};
    for (int i = 0; w->structure == PW_DIRECT_1_SHAPED && i < w->order; i++)
        row[n++] = (word_row){k[i], feedback[i], 0, feedback[i]};
    return n;
}

static int coupled_rows(const pw_words *w, word_row *row)
{
    static const char *const name[] = {"sigma", "omega", "g", "c1", "c2", "d"};
    const int32_t word[] = {w->sigma, w->omega, w->g, w->c1, w->c2, w->d};
    for (int i = 0; i < 6; i++) {
        int fraction = i < 3 ? w->a_fraction : w->c_fraction;
        row[i] = (word_row){name[i], word[i], fraction, ldexp(word[i], -fraction)};
    }
    return 6;
}

static void put_section(int number, const pw_words *w, bool fixed, pw_text *out)
{
    word_row row[MOST_WORDS];
    int n = fixed && w->structure == PW_COUPLED ? coupled_rows(w, row) : direct_rows(w, fixed, row);
    for (int i = 0; i < n; i++) {
        pw_text_add(out, "<tr>");
        if (!i)
            pw_text_print(out, "<th scope=\"rowgroup\" rowspan=\"%d\">%d, %s</th>", n, number,
                          pw_structure_word(w->structure));
        pw_text_print(out, "<th scope=\"row\">%s</th>", row[i].name);
        if (fixed) pw_text_print(out, "<td class=\"n\">%.0f</td><td class=\"n\">", row[i].word);
        if (fixed && row[i].fraction)
            pw_text_print(out, "2<sup>\342\210\222%d</sup>", row[i].fraction);
        if (fixed) pw_text_add(out, "</td>");
        pw_text_print(out, "<td class=\"n\">%.*g</td></tr>\n", fixed ? 12 : 17, row[i].value);
    }
}

void pw_html_words(const pw_results *results, pw_text *out)
{
    const pw_realisation *r = &results->realisation;
    bool fixed = pw_is_fixed(r);
    pw_html_open("words", "Words", out);
    put_sentence(r->structure_why, out);
    put_sentence(r->order_why, out);
    pw_text_print(out,
                  "<div class=\"wide\" role=\"group\" aria-label=\"Words\" tabindex=\"0\"><table>"
                  "<thead><tr><th scope=\"col\">section</th><th scope=\"col\">name</th>%s"
                  "<th scope=\"col\">value</th></tr></thead>\n",
                  fixed ? "<th scope=\"col\">word</th><th scope=\"col\">times</th>" : "");
    for (int i = 0; i < r->count; i++) {
        pw_text_add(out, "<tbody>\n");
        put_section(i + 1, &r->section[i], fixed, out);
        pw_text_add(out, "</tbody>\n");
    }
    pw_text_add(out, "</table></div>\n");
    pw_html_close(out);
}

/* ---- cost, use, end ---- */

void pw_html_cost(const pw_results *results, pw_text *out)
{
    const pw_cost *c = &results->cost;
    char figure[PW_FIGURE_ROOM];
    pw_html_open("cost", "Cost", out);
    pw_text_add(out, "<dl class=\"facts\">\n");
    put_fact("target", results->target.name ? results->target.name : "host", out);
    if (isfinite(c->cycles_per_sample))
        put_fact("cycles a sample", pw_figure(figure, c->cycles_per_sample, "cycles"), out);
    snprintf(figure, sizeof figure, "%d", c->multiplies_per_sample);
    put_fact("multiplies a sample", figure, out);
    put_fact("flash", pw_figure(figure, (double)c->flash_bytes, "bytes"), out);
    put_fact("RAM a channel", pw_figure(figure, (double)c->ram_bytes, "bytes"), out);
    if (c->stack_bytes) put_fact("stack", pw_figure(figure, (double)c->stack_bytes, "bytes"), out);
    pw_text_add(out, "</dl>\n");
    pw_html_close(out);
}

static const char *sample_type(pw_sample sample)
{
    switch (sample) {
    case PW_Q15: return "int16_t";
    case PW_Q31: return "int32_t";
    case PW_FLOAT64: return "double";
    default: return "float";
    }
}

void pw_html_use(const pw_results *results, pw_text *out)
{
    const char *name = results->stage->name, *type = sample_type(results->realisation.sample);
    pw_html_open("use", "Using the C", out);
    pw_text_print(out, "<pre id=\"code\" tabindex=\"0\"><code>#include \"%s.h\"\n\n"
                  "static %s_state filter;              /* one for each channel */\n\n"
                  "void start(%s first)\n{\n    %s_reset(&amp;filter);\n"
                  "    %s_settle(&amp;filter, first);    /* as if first had been there for ever"
                  " */\n}\n\n"
                  "%s on_sample(%s x)\n{\n    return %s_step(&amp;filter, x);\n}\n</code></pre>\n",
                  name, name, type, name, name, type, type, name);
    pw_text_print(out, "<p class=\"copy\"><button type=\"button\" id=\"copy\" hidden>Copy</button>"
                  "<span id=\"copied\" role=\"status\"></span></p>\n"
                  "<p>Compile every <code>.c</code> file of this folder but the self-test with"
                  " <code>-std=c99 -O2%s</code>. Run <code>%s_selftest()</code> once on the"
                  " part: it"
                  " returns 0 when every sample is as expected.</p>\n",
                  pw_is_fixed(&results->realisation) ? "" : " -ffp-contract=off", name);
    pw_html_close(out);
}

static void put_defaults(const pw_stage *stage, pw_text *out)
{
    if (!stage->taken || !*stage->taken) return;
    pw_html_open("defaults", "Defaults taken", out);
    pw_text_add(out, "<ul class=\"plain\">\n");
    for (const char *const *d = stage->taken; *d; d++) {
        pw_text_add(out, "<li><code>");
        pw_html_text(*d, out);
        pw_text_add(out, "</code></li>\n");
    }
    pw_text_add(out, "</ul>\n");
    pw_html_close(out);
}

void pw_html_end(const pw_results *results, pw_text *out)
{
    const pw_stage *stage = results->stage;
    put_defaults(stage, out);
    pw_html_open("cautions", "Cautions", out);
    pw_text_add(out, "<ul>\n");
    for (const char *const *c = pw_cautions; *c; c++) pw_text_print(out, "<li>%s</li>\n", *c);
    pw_text_add(out, "</ul>\n");
    pw_html_close(out);
    pw_html_open("again", "Made again", out);
    pw_text_print(out, "<p><code>polewright build %s.yaml</code> with polewright %s makes this page"
                  " again, byte for byte, from the stage file with SHA-256 <code"
                  " class=\"hash\">%s</code>.</p>\n",
                  stage->name, PW_VERSION, stage->sha256);
    pw_html_close(out);
}
