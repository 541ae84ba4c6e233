/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The sections of report.html without plots: range, words, cost, use and the end. */
#include "report/html_parts.h"

#include <math.h>
#include <stdio.h>

#include "report/figures.h"
#include "report/nodes.h"
#include "report/phrases.h"

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
        pw_html_say(pw_text_string(&body), out);
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
    pw_html_say(r->structure_why, out);
    pw_html_say(r->order_why, out);
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
    pw_html_fact("target", results->target.name ? results->target.name : "host", out);
    if (isfinite(c->cycles_per_sample))
        pw_html_fact("cycles a sample, about",
                     pw_figure(figure, c->cycles_per_sample, pw_cost_unit(results)), out);
    snprintf(figure, sizeof figure, "%d", c->multiplies_per_sample);
    pw_html_fact("multiplies a sample", figure, out);
    if (c->flash_bytes >= 0)
        pw_html_fact("flash", pw_figure(figure, (double)c->flash_bytes, "bytes"), out);
    pw_html_fact("RAM a channel", pw_figure(figure, (double)c->ram_bytes, "bytes"), out);
    if (c->stack_bytes)
        pw_html_fact("stack", pw_figure(figure, (double)c->stack_bytes, "bytes"), out);
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

/* What an interrupt does: with converter codes where the stage file tells the converters' bits. */
static void put_handler(const pw_results *results, pw_text *out)
{
    const pw_stage *stage = results->stage;
    const char *name = stage->name, *type = sample_type(results->realisation.sample);
    if (stage->input.bits && stage->output.bits) {
        const char *in = stage->input.bits > 16 ? "uint32_t" : "uint16_t";
        const char *back = stage->output.bits > 16 ? "uint32_t" : "uint16_t";
        pw_text_print(out, "%s on_code(%s code)\n{\n    %s x = %s_from_code(code);\n"
                      "    return %s_to_code(%s_step(&amp;filter, x));\n}\n", back, in, type, name,
                      name, name);
    } else
        pw_text_print(out, "%s on_sample(%s x)\n{\n    return %s_step(&amp;filter, x);\n}\n", type,
                      type, name);
}

void pw_html_use(const pw_results *results, pw_text *out)
{
    const char *name = results->stage->name, *type = sample_type(results->realisation.sample);
    pw_html_open("use", "Using the C", out);
    pw_text_print(out, "<pre id=\"code\" tabindex=\"0\"><code>#include \"%s.h\"\n\n"
                  "static %s_state filter;               /* one for each channel */\n\n"
                  "void start(%s first)\n{\n"
                  "    %s_settle(&amp;filter, first);     /* as if first had been there for ever"
                  " */\n}\n\n",
                  name, name, type, name);
    put_handler(results, out);
    pw_text_add(out, "</code></pre>\n");
    pw_text_print(out, "<p class=\"copy\"><button type=\"button\" id=\"copy\" hidden>Copy</button>"
                  "<span id=\"copied\" role=\"status\"></span></p>\n"
                  "<p>Compile every <code>.c</code> file of this folder but the self-test with"
                  " <code>-std=c99 -O2%s</code>. Run <code>%s_selftest()</code> once on the part:"
                  " it returns 0 when every sample is as expected.</p>\n",
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
