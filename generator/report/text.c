/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/text.h"

#include <math.h>
#include <string.h>

#include "report/figures.h"
#include "report/nodes.h"
#include "report/phrases.h"
#include "report/style.h"
#include "report/table.h"
#include "report/text_full.h"
#include "report/tolerance.h"

#define WIDTH 100             /* columns */
#define SCREEN 22             /* lines: two of 24 are left for what the verb adds */
#define LABEL 10              /* columns of the label of a line */
#define MOST_NODES 4

/* ---- verdict ---- */

static void put_verdict(const pw_results *results, const pw_style *style, pw_text *out)
{
    const char *color = !results->limits ? "" : results->met ? style->good : style->bad;
    pw_text_print(out, "%s%s%s: %s", style->strong, results->stage->name, style->plain, color);
    pw_phrase_verdict(results, out);
    pw_text_print(out, "%s\n", style->plain);
}

static void put_limits(const pw_results *results, const pw_style *style, pw_text *out)
{
    pw_table table = {.align = "llll"};
    for (int i = 0; i < results->limits; i++) {
        const pw_limit_row *row = &results->limit[i];
        pw_text name = {0}, asked = {0}, found = {0};
        pw_phrase_limit(results, row, &name, &asked, &found);
        pw_table_cell(&table, "%s%s%s", row->met ? style->good : style->bad,
                      row->met ? "met" : "NOT MET", style->plain);
        pw_table_cell(&table, "%s", pw_text_string(&name));
        pw_table_cell(&table, "%s", pw_text_string(&asked));
        pw_table_cell(&table, "found %s", pw_text_string(&found));
        pw_text_free(&name);
        pw_text_free(&asked);
        pw_text_free(&found);
    }
    pw_table_print(&table, 2, out);
}

/* ---- labelled lines ---- */

static void put_line(const char *label, pw_text *body, const pw_style *style, pw_text *out)
{
    pw_text_print(out, "%s%-*s%s", style->strong, LABEL, label, style->plain);
    pw_text_wrap(pw_text_string(body), LABEL, WIDTH, out);
    pw_text_free(body);
}

static void add_peaks(const char *label, const pw_error_figures *e, pw_text *out)
{
    char db[PW_FIGURE_ROOM], deg[PW_FIGURE_ROOM];
    pw_text_print(out, "%s %s and %s", label, pw_figure(db, e->magnitude_db.max, "dB"),
                  pw_figure(deg, e->phase_deg.max, "deg"));
}

static void put_errors(const pw_results *results, bool parts, const pw_style *style, pw_text *out)
{
    const pw_response *r = &results->response;
    const pw_error_figures *e = &r->total;
    char low[PW_FIGURE_ROOM], high[PW_FIGURE_ROOM];
    pw_text body = {0};
    pw_phrase_peak(&e->magnitude_db, "dB", &body);
    pw_text_add(&body, ", ");
    pw_phrase_peak(&e->phase_deg, "deg", &body);
    pw_text_add(&body, ", ");
    pw_phrase_peak(&e->delay_s, "s", &body);
    put_line("Error", &body, style, out);
    if (!parts) return;
    add_peaks("transform", &r->transform, &body);
    if (results->digital.candidates > 1) {
        pw_text_add(&body, " (");
        pw_phrase_choice(&results->digital, &body);
        pw_text_add(&body, ")");
    }
    add_peaks("; words", &r->quantisation, &body);
    pw_text_print(&body, "; band %s to %s", pw_figure(low, r->band_hz[0], "Hz"),
                  pw_figure(high, r->band_hz[1], "Hz"));
    put_line("", &body, style, out);
}

typedef void phrase(const pw_results *results, pw_text *out);

static void put_phrase(const char *label, phrase *say, const pw_results *results,
                       const pw_style *style, pw_text *out)
{
    pw_text body = {0};
    say(results, &body);
    put_line(label, &body, style, out);
}

/* The fullest nodes, as many as there are lines for, the heading included. */
static void put_nodes(const pw_results *results, int lines, pw_text *out)
{
    const pw_realisation *r = &results->realisation;
    int order[PW_MAX_NODES], n = lines - 1;
    pw_table table = {.align = PW_NODE_ALIGN};
    if (n > MOST_NODES) n = MOST_NODES;
    if (n > r->nodes) n = r->nodes;
    if (n < 1 || !pw_is_fixed(r)) return;
    pw_nodes_by_headroom(r, order);
    pw_node_head(&table);
    for (int i = 0; i < n; i++) pw_node_row(results, &r->node[order[i]], &table);
    pw_table_print(&table, 2, out);
}

/* How much is left out, in this order, where a screen has no room for everything. */
typedef enum room { ROOM_FOR_ALL, NO_ERROR_PARTS, NO_COST, NO_SPREAD, NO_CYCLES } room;

/* What stands above and below the table of nodes. */
static void compose(const pw_results *results, room left_out, const pw_style *style, pw_text *head,
                    pw_text *tail)
{
    pw_text body = {0};
    put_phrase("Stage", pw_phrase_stage, results, style, head);
    put_errors(results, left_out < NO_ERROR_PARTS, style, head);
    if (results->spread && left_out < NO_SPREAD)
        put_phrase("Parts", pw_phrase_spread, results, style, head);
    put_phrase("Range", pw_phrase_range, results, style, head);
    put_phrase("Noise", pw_phrase_noise, results, style, tail);
    if (left_out < NO_CYCLES) put_phrase("Cycles", pw_phrase_limit_cycle, results, style, tail);
    if (left_out < NO_COST) put_phrase("Cost", pw_phrase_cost, results, style, tail);
    pw_text_add(&body, pw_caution_short);
    put_line("Caution", &body, style, tail);
    if (left_out == ROOM_FOR_ALL) return;
    pw_text_add(&body, "--verbose prints what found no room here");
    put_line("More", &body, style, tail);
}

static void put_screen(const pw_results *results, const pw_style *style, pw_text *out)
{
    pw_text head = {0}, tail = {0};
    for (int left_out = ROOM_FOR_ALL; left_out <= NO_CYCLES; left_out++) {
        pw_text_free(&head);
        pw_text_free(&tail);
        compose(results, (room)left_out, style, &head, &tail);
        if (pw_text_lines(out) + pw_text_lines(&head) + pw_text_lines(&tail) <= SCREEN) break;
    }
    pw_text_add(out, pw_text_string(&head));
    put_nodes(results, SCREEN - pw_text_lines(out) - pw_text_lines(&tail), out);
    pw_text_add(out, pw_text_string(&tail));
    pw_text_free(&head);
    pw_text_free(&tail);
}

void pw_report_text(const pw_results *results, bool color, bool full, pw_text *out)
{
    const pw_style *style = pw_style_of(color);
    pw_text body = {0};
    put_verdict(results, style, &body);
    put_limits(results, style, &body);
    if (results->limits) pw_text_add(&body, "\n");
    if (full) pw_report_text_full(results, style, &body);
    else put_screen(results, style, &body);
    pw_text_add(out, pw_text_string(&body));
    pw_text_free(&body);
}
