/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The sections of report.html that hold plots. */
#include "report/html_parts.h"

#include <math.h>
#include <stdio.h>

#include "report/figures.h"
#include "report/phrases.h"
#include "report/tolerance.h"

/* ---- figures ---- */

static const char *const plot_id[PW_PLOTS] = {"p-response", "p-delay", "p-step", "p-s", "p-z",
                                              "p-noise"};

static void put_missing(const pw_plots *plots, pw_text *out)
{
    if (plots->wanted)
        pw_text_add(out,
                    "<p class=\"none\">No plot here: <code>gnuplot</code> was not found, or failed,"
                    " when this report was made. Install it (on Debian: <code>apt-get install"
                    " gnuplot-nox</code>)"
                    " and build again.</p>\n");
    else pw_text_add(out, "<p class=\"none\">Left out: this report was made without plots.</p>\n");
}

/* alternative: what the plot shows, for those who cannot see it. */
static void put_plot(const pw_plots *plots, pw_plot which, const char *alternative, pw_text *out)
{
    if (!plots->drawn) {
        put_missing(plots, out);
        return;
    }
    pw_text_print(out, "<svg id=\"%s\" viewBox=\"0 0 %d %d\" role=\"img\" aria-label=\"",
                  plot_id[which],
                  PW_PLOT_WIDTH, pw_plot_height(which));
    pw_html_text(alternative, out);
    pw_text_print(out, "\">\n%s</svg>\n", pw_text_string(&plots->body[which]));
}

static void put_key(const char *first, const char *second, bool noise, pw_text *out)
{
    pw_text_print(out, "<p class=\"key\"><span><i class=\"k%d\"></i>%s</span>"
                  "<span><i class=\"k2\"></i>%s</span></p>\n", noise ? 3 : 1, first, second);
}

/* ---- response ---- */

static void put_error_cells(const pw_error_figures *e, pw_text *out)
{
    const pw_error_peak *peak[] = {&e->magnitude_db, &e->phase_deg, &e->delay_s};
    const char *const unit[] = {"dB", "deg", "s"};
    for (int i = 0; i < 3; i++) {
        pw_text cell = {0};
        pw_phrase_peak(peak[i], unit[i], &cell);
        pw_text_add(out, "<td>");
        pw_html_text(pw_text_string(&cell), out);
        pw_text_add(out, "</td>");
        pw_text_free(&cell);
    }
}

static void put_errors(const pw_results *results, pw_text *out)
{
    const pw_response *r = &results->response;
    char low[PW_FIGURE_ROOM], high[PW_FIGURE_ROOM];
    const struct { const char *name; const pw_error_figures *e; } row[] = {
        {"transform", &r->transform}, {"words", &r->quantisation}, {"both", &r->total}};
    pw_text_print(out,
                  "<div class=\"wide\" role=\"group\" aria-label=\"Errors\" tabindex=\"0\"><table>"
                  "<caption>Largest error from %s to %s, where the analog magnitude is within %g"
                  " dB of"
                  " its peak</caption>\n<thead><tr><th scope=\"col\">from</th><th scope=\"col\">"
                  "magnitude</th><th scope=\"col\">phase</th><th scope=\"col\">group delay</th>"
                  "</tr>"
                  "</thead>\n<tbody>\n", pw_figure(low, r->band_hz[0], "Hz"),
                  pw_figure(high, r->band_hz[1], "Hz"), results->stage->limits.floor_db);
    for (int i = 0; i < 3; i++) {
        pw_text_print(out, "<tr><th scope=\"row\">%s</th>", row[i].name);
        put_error_cells(row[i].e, out);
        pw_text_add(out, "</tr>\n");
    }
    pw_text_add(out, "</tbody></table></div>\n");
}

static void put_cell(double value, const char *format, pw_text *out)
{
    pw_text_add(out, "<td>");
    if (isfinite(value)) pw_text_print(out, format, value);
    pw_text_add(out, "</td>");
}

/* Every 12th row of the response, for those who want figures. */
static void put_table(const pw_response *r, pw_text *out)
{
    pw_text_add(out, "<details><summary>The response in figures</summary>\n"
                "<div class=\"wide\" role=\"group\" aria-label=\"Response\" tabindex=\"0\"><table>"
                "<thead><tr><th scope=\"col\">frequency</th><th scope=\"col\">analog, dB</th>"
                "<th scope=\"col\">digital, dB</th><th scope=\"col\">analog, deg</th>"
                "<th scope=\"col\">digital, deg</th></tr></thead>\n<tbody>\n");
    for (int i = 0; i < r->rows; i += 12) {
        const pw_response_row *row = &r->row[i];
        char hz[PW_FIGURE_ROOM];
        pw_text_print(out, "<tr><th scope=\"row\">%s</th>", pw_figure(hz, row->hz, "Hz"));
        put_cell(row->analog_db, "%.4f", out);
        put_cell(row->digital_db, "%.4f", out);
        put_cell(row->analog_deg, "%.3f", out);
        put_cell(row->digital_deg, "%.3f", out);
        pw_text_add(out, "</tr>\n");
    }
    pw_text_add(out, "</tbody></table></div></details>\n");
}

/* The script fills this and shows it. */
static void put_reader(const pw_response *r, pw_text *out)
{
    pw_text_print(out, "<div class=\"reader\" id=\"reader\" hidden>\n"
                  "<label for=\"cursor\">Read at</label> <input id=\"cursor\" type=\"range\""
                  " min=\"0\""
                  " max=\"%d\" value=\"%d\" step=\"1\">\n"
                  "<output id=\"reading\" for=\"cursor\" aria-live=\"polite\"></output>\n</div>\n",
                  r->rows - 1, r->rows / 2);
}

void pw_html_response(const pw_results *results, const pw_plots *plots, pw_text *out)
{
    const pw_response *r = &results->response;
    char from[PW_FIGURE_ROOM], to[PW_FIGURE_ROOM];
    pw_text words = {0};
    pw_html_open("response", "Response", out);
    pw_text_print(&words,
                  "Magnitude, phase and magnitude error from %s to %s. The largest magnitude"
                  " error in the band is ", pw_figure(from, plots->span_hz[0], "Hz"),
                  pw_figure(to, plots->span_hz[1], "Hz"));
    pw_phrase_peak(&r->total.magnitude_db, "dB", &words);
    pw_text_add(&words, ".");
    pw_text_add(out, "<figure class=\"tall\">\n");
    put_plot(plots, PW_PLOT_RESPONSE, pw_text_string(&words), out);
    if (plots->drawn) {
        put_key("analog stage", "its digital twin, words included", false, out);
        put_reader(r, out);
        pw_text_print(out, "<figcaption>Upright lines: the band that is judged.%s%s</figcaption>\n",
                      results->spread ? " Shaded about the curves: what the parts' tolerances"
                      " span." : "",
                      results->stage->limits.magnitude_db.given
                      ? " Shaded about the error: the limit." : "");
    }
    pw_text_add(out, "</figure>\n");
    if (results->spread) pw_html_sentence(pw_phrase_spread, results, out);
    put_errors(results, out);
    put_table(r, out);
    pw_html_close(out);
    pw_text_free(&words);
}

/* ---- the others ---- */

void pw_html_delay(const pw_results *results, const pw_plots *plots, pw_text *out)
{
    pw_text words = {0};
    pw_html_open("delay", "Group delay", out);
    pw_text_add(&words,
                "Group delay of both over frequency; the largest difference in the band is ");
    pw_phrase_peak(&results->response.total.delay_s, "s", &words);
    pw_text_add(out, "<figure>\n");
    put_plot(plots, PW_PLOT_DELAY, pw_text_string(&words), out);
    if (plots->drawn) put_key("analog", "digital", false, out);
    pw_text_add(out, "</figure>\n");
    pw_html_close(out);
    pw_text_free(&words);
}

void pw_html_step(const pw_results *results, const pw_plots *plots, pw_text *out)
{
    (void)results;
    pw_html_open("step", "Step response", out);
    pw_text_add(out, "<figure>\n");
    put_plot(plots, PW_PLOT_STEP, "Output over time after an input step of 1 V, of the analog stage"
             " and of the digital filter", out);
    if (plots->drawn) {
        put_key("analog", "digital, sample by sample", false, out);
        pw_text_print(out, "<figcaption>Rounding and clipping left out.%s</figcaption>\n",
                      plots->step_logarithmic ? " Time is logarithmic: fast and slow poles lie far"
                      " apart." : "");
    }
    pw_text_add(out, "</figure>\n");
    pw_html_close(out);
}

void pw_html_planes(const pw_results *results, const pw_plots *plots, pw_text *out)
{
    char words[200];
    pw_html_open("roots", "Poles and zeros", out);
    if (!plots->drawn) put_missing(plots, out);
    else {
        pw_text_add(out, "<div class=\"two\"><figure>\n");
        snprintf(words, sizeof words, "The s plane with %d poles and %d zeros",
                 results->analog.poles,
                 results->analog.zeros);
        put_plot(plots, PW_PLOT_S_PLANE, words, out);
        pw_text_print(out, "<figcaption>s plane, as frequency%s</figcaption></figure>\n<figure>\n",
                      plots->plane_compressed ? "; axes compressed, so that near and far roots"
                                                " show" : "");
        snprintf(words, sizeof words, "The z plane and the unit circle with %d poles and %d zeros",
                 results->digital.z.poles, results->digital.z.zeros);
        put_plot(plots, PW_PLOT_Z_PLANE, words, out);
        pw_text_add(out, "<figcaption>z plane and unit circle</figcaption></figure></div>\n"
                    "<p class=\"key\"><span><b class=\"x\">\303\227</b>pole</span>"
                    "<span><b class=\"o\">\342\227\213</b>zero</span></p>\n");
    }
    pw_html_roots(results, out);
    pw_html_close(out);
}

void pw_html_noise(const pw_results *results, const pw_plots *plots, pw_text *out)
{
    const pw_realisation *r = &results->realisation;
    pw_html_open("noise", "Noise", out);
    pw_html_sentence(pw_phrase_noise, results, out);
    if (r->noise.given) {
        pw_text_add(out, "<figure>\n");
        put_plot(plots, PW_PLOT_NOISE,
                 "Power density of the round-off at the output over frequency",
                 out);
        if (plots->drawn)
            put_key("what the rounding of the input becomes", "what the filter adds", true, out);
        pw_text_add(out, "</figure>\n<h3>Limit cycles</h3>\n");
        pw_html_sentence(pw_phrase_limit_cycle, results, out);
    }
    pw_html_close(out);
}

void pw_html_rows(const pw_results *results, pw_text *out)
{
    const pw_response *r = &results->response;
    pw_text_print(out, "<script type=\"application/json\" id=\"rows\">{\"left\":%d,\"right\":%d,"
                  "\"rows\":[", PW_PLOT_LEFT, PW_PLOT_RIGHT);
    for (int i = 0; i < r->rows; i++) {
        const pw_response_row *row = &r->row[i];
        const double column[] = {row->hz, row->analog_db, row->digital_db, row->analog_deg,
                                 row->digital_deg};
        for (int k = 0; k < 5; k++) {
            pw_text_add(out, k ? "," : i ? ",\n[" : "\n[");
            if (isfinite(column[k])) pw_text_print(out, "%.9g", column[k]);
            else pw_text_add(out, "null");
        }
        pw_text_add(out, "]");
    }
    pw_text_add(out, "]}</script>\n");
}
