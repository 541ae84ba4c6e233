/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The sections of report.html without plots: verdict, stage and roots. */
#include "report/html_parts.h"

#include <ctype.h>
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "report/figures.h"
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

void pw_html_say(const char *text, pw_text *out)
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
    pw_html_say(pw_text_string(&body), out);
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

void pw_html_fact(const char *name, const char *value, pw_text *out)
{
    pw_text_print(out, "<div><dt>%s</dt><dd>", name);
    pw_html_text(value, out);
    pw_text_add(out, "</dd></div>\n");
}

static void put_transform(const pw_results *results, pw_text *out)
{
    pw_text body = {0};
    pw_phrase_transform(&results->digital, &body);
    if (results->digital.candidates > 1) pw_text_add(&body, "; ");
    pw_phrase_choice(&results->digital, &body);
    pw_html_fact("transform", pw_text_string(&body), out);
    pw_text_free(&body);
}

static void put_arithmetic(const pw_realisation *r, pw_text *out)
{
    char words[PW_FIGURE_ROOM];
    if (!pw_is_fixed(r)) {
        pw_html_fact("samples", pw_sample_word(r->sample), out);
        return;
    }
    snprintf(words, sizeof words, "%s, %d-bit coefficients", pw_sample_word(r->sample),
             r->coefficient_bits);
    pw_html_fact("samples", words, out);
    pw_html_fact("scaling", pw_scaling_word(r->scaling), out);
    pw_html_fact("rounding", r->truncate ? "truncates" : "to nearest", out);
    pw_html_fact("overflow", r->wrap ? "wraps" : "saturates", out);
}

static void put_candidates(const pw_digital *digital, pw_text *out)
{
    if (digital->candidates < 2) return;
    pw_text_add(out, "<details><summary>The transforms that were tried</summary>\n"
                "<div class=\"wide\" role=\"group\" aria-label=\"Transforms\" tabindex=\"0\">"
                "<table>"
                "<thead><tr><th scope=\"col\">transform</th><th scope=\"col\">how</th>"
                "<th scope=\"col\">magnitude error</th><th scope=\"col\">phase error</th></tr>"
                "</thead>\n<tbody>\n");
    for (int i = 0; i < digital->candidates; i++) {
        const pw_candidate *c = &digital->candidate[i];
        char db[PW_FIGURE_ROOM] = "", deg[PW_FIGURE_ROOM] = "";
        pw_text how = {0};
        pw_phrase_candidate(c, &how);
        if (c->possible) pw_figure(db, c->magnitude_error_db, "dB");
        if (c->possible) pw_figure(deg, c->phase_error_deg, "deg");
        pw_text_print(out, "<tr><th scope=\"row\">%s</th><td>%s</td><td>%s</td><td>%s</td></tr>\n",
                      pw_method_word(c->method), pw_text_string(&how), db, deg);
        pw_text_free(&how);
    }
    pw_text_add(out, "</tbody></table></div></details>\n");
}

void pw_html_stage(const pw_results *results, pw_text *out)
{
    const pw_realisation *r = &results->realisation;
    char figure[PW_FIGURE_ROOM];
    pw_html_open("stage", "Stage", out);
    pw_html_sentence(pw_phrase_stage, results, out);
    pw_text_add(out, "<dl class=\"facts\">\n");
    pw_html_fact("sample rate", pw_figure(figure, results->stage->rate_hz, "Hz"), out);
    put_transform(results, out);
    put_arithmetic(r, out);
    pw_html_fact("full scale in", pw_figure(figure, r->input_full_scale, "V"), out);
    pw_html_fact("largest input", pw_figure(figure, r->input_peak * r->input_full_scale, "V"), out);
    pw_html_fact("full scale out", pw_figure(figure, r->output_full_scale, "V"), out);
    pw_text_add(out, "</dl>\n");
    put_candidates(&results->digital, out);
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
