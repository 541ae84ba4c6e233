/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <inttypes.h>
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "report/figures.h"
#include "report/table.h"
#include "twin/say.h"

#define SHOWN_POINTS 12

const char *pw_twin_verdict(const pw_points *points)
{
    return !points || !points->judged ? "not judged" : points->agrees ? "agrees" : "differs";
}

static void row(pw_text *out, const char *name) { pw_text_print(out, "  %-18s", name); }

static void put_residual(pw_text *out, const char *name, const pw_residual *r,
                         const pw_comparison *c, double rate)
{
    char rms[PW_FIGURE_ROOM], peak[PW_FIGURE_ROOM], at[PW_FIGURE_ROOM];
    row(out, name);
    pw_text_print(out, "rms %s, peak %s", pw_figure(rms, r->rms, "V"),
                  pw_figure(peak, r->peak, "V"));
    if (!isnan(c->lsb))
        pw_text_print(out, " (%.3g and %.3g LSB)", r->rms / c->lsb, r->peak / c->lsb);
    pw_text_print(out, ", the peak at %s\n", pw_figure(at, (double)r->peak_at / rate, "s"));
}

static void put_flat(pw_text *out, const char *what, const pw_flat *flat)
{
    char runs[PW_FIGURE_ROOM];
    if (!flat->runs) return;
    row(out, "flat tops");
    pw_text_print(
        out,
        "%" PRId64
        " samples of the %s in %s of four or more at its largest or smallest value: it may be "
        "clipped\n",
        flat->samples, what, pw_count(runs, flat->runs, "run"));
}

static void put_record(const pw_results *results, const pw_comparison *c, pw_text *out)
{
    char a[PW_FIGURE_ROOM], b[PW_FIGURE_ROOM];
    double rate = results->stage->rate_hz;
    pw_text_add(out, "record\n");
    row(out, "length");
    pw_text_print(out, "%s", pw_samples(a, (double)c->frames, rate));
    if (c->skipped)
        pw_text_print(out, ", the first %s left out while the twin settles",
                      pw_samples(b, (double)c->skipped, rate));
    pw_text_add(out, "\n");
    row(out, "delay");
    pw_text_print(out, "%.4g samples (%s): the board behind the twin\n", c->delay_samples,
                  pw_figure(a, c->delay_samples / rate, "s"));
    row(out, "gain");
    if (isnan(c->gain)) pw_text_add(out, "not known: the twin's output does not move\n");
    else pw_text_print(out, "%.6g (%+.4f dB%s), offset %s\n", c->gain, 20 * log10(fabs(c->gain)),
                       c->gain < 0 ? ", upside down" : "", pw_figure(a, c->offset, "V"));
    put_residual(out, "difference", &c->raw, c, rate);
    put_residual(out, "what is left", &c->left, c, rate);
    row(out, "normalised");
    pw_text_print(out,
                  "%.3g %% of the output's rms is left once delay, gain and offset are taken out\n",
                  100 * c->normalised);
    put_flat(out, "input", &c->flat_input);
    put_flat(out, "output", &c->flat_output);
    if (c->clipped)
        row(out, "twin"), pw_text_print(out, "nodes clipped %" PRIu64 " times\n", c->clipped);
    if (c->outside)
        row(out, "input"),
            pw_text_print(out, "%" PRIu64 " samples beyond full scale, clamped\n", c->outside);
    if (c->railed)
        row(out, "rails"),
            pw_text_print(out, "%" PRIu64 " samples of the twin at the output's rails\n",
                          c->railed);
    row(out, "spectrum");
    if (!c->segment) pw_text_add(out, "none: the record is too short (512 samples would do)\n");
    else
        pw_text_print(out, "segments of %d samples, worth %.3g averages\n", c->segment,
                      c->averages);
}

static void put_reference(const pw_comparison *c, double rate, pw_text *out)
{
    const pw_reference_figures *f = &c->reference;
    char hz[PW_FIGURE_ROOM], delay[PW_FIGURE_ROOM];
    if (!f->given) return;
    pw_text_print(out, "\nreference: the analog stage itself, its input %s between samples\n",
                  f->linear ? "in straight lines" : "held");
    put_residual(out, "twin", &f->error, c, rate);
    if (f->hold_delay_samples > 0)
        put_residual(out, "without the hold", &f->error_aligned, c, rate);
    put_residual(out, "board", &f->board, c, rate);
    row(out, "hold");
    pw_text_print(out, "alone loses %.4f dB at %s", -f->edge_droop_db,
                  pw_figure(hz, f->edge_hz, "Hz"));
    if (f->hold_delay_samples > 0)
        pw_text_print(out, " and half a sample, %s", pw_figure(delay, 0.5 / rate, "s"));
    pw_text_add(out, ": in these figures, and not the filter's doing\n");
    row(out, "anti-alias");
    pw_text_add(
        out, "what a filter before the converter takes away, or folds, is in the record already:\n"
             "                    in no figure here\n");
}

static void put_point(const pw_points *points, const pw_point *p, pw_table *table)
{
    char hz[PW_FIGURE_ROOM];
    bool allowed = points->allowed != PW_ALLOWED_NOTHING;
    pw_table_cell(table, "%s", pw_figure(hz, p->hz, "Hz"));
    if (p->excited) pw_table_cell(table, "%.3f", p->db);
    else pw_table_cell(table, "%s", "");
    if (p->excited && p->band_db > 0) pw_table_cell(table, "+- %.3f", p->band_db);
    else pw_table_cell(table, "%s", "");
    if (isnan(p->twin_db)) pw_table_cell(table, "%s", "");
    else pw_table_cell(table, "%.3f", p->twin_db);
    pw_table_cell(table, "%.3f", p->analog_db);
    if (allowed) pw_table_cell(table, "%.3f .. %.3f", p->low_db, p->high_db);
    else pw_table_cell(table, "%s", "");
    pw_table_cell(table, "%s",
                  !p->excited       ? "too little excitation"
                  : !points->judged ? ""
                  : p->inside       ? "inside"
                                    : "OUTSIDE");
}

static void put_points(const pw_points *points, bool verbose, pw_text *out)
{
    static const char *const head[] = {"frequency", "measured dB", "95 %", "twin dB",
                                       "analog dB", "allowed dB",  ""};
    pw_table table = {.align = "lrrrrrl"};
    int every = verbose || points->count <= SHOWN_POINTS
                    ? 1
                    : (points->count + SHOWN_POINTS - 1) / SHOWN_POINTS;
    for (int i = 0; i < 7; i++) pw_table_cell(&table, "%s", head[i]);
    for (int i = 0; i < points->count; i++)
        if (i % every == 0 || i == points->worst || i == points->count - 1)
            put_point(points, &points->list[i], &table);
    pw_table_print(&table, 2, out);
}

static void put_worst(const pw_points *points, pw_text *out)
{
    char hz[PW_FIGURE_ROOM];
    int quiet = 0;
    for (int i = 0; i < points->count; i++) quiet += !points->list[i].excited;
    if (quiet)
        pw_text_print(out, "\n%d of %d frequencies have too little excitation to say anything.\n",
                      quiet, points->count);
    if (points->worst < 0) return;
    const pw_point *p = &points->list[points->worst];
    bool twin = !isnan(p->twin_db);
    pw_text_print(out, "\nThe worst frequency is %s: %+.3f dB against the %s",
                  pw_figure(hz, p->hz, "Hz"), p->db - (twin ? p->twin_db : p->analog_db),
                  twin ? "twin" : "analog stage");
    if (!isnan(p->deg))
        pw_text_print(out, ", %+.2f degrees", p->deg - (twin ? p->twin_deg : p->analog_deg));
    pw_text_add(out, ".\n");
}

static void put_verdict(const pw_points *points, pw_text *out)
{
    if (points->allowed == PW_ALLOWED_NOTHING)
        pw_text_add(out,
                    "Not judged: no part has a tolerance, and limits.magnitude is not given.\n");
    else if (!points->judged) pw_text_add(out, "Not judged: no frequency can be.\n");
    else {
        pw_text_print(out, "The board %s with its model: %d of %d points (%.1f %%) lie inside ",
                      points->agrees ? "agrees" : "DOES NOT agree", points->inside, points->judged,
                      100.0 * points->inside / points->judged);
        if (points->allowed == PW_ALLOWED_LIMITS)
            pw_text_add(out, "the limits of the stage file.\n");
        else
            pw_text_print(out,
                          "what the tolerances span (%" PRId64 " draws, seed %" PRIu64
                          ", and the worst corners).\n",
                          points->draws, points->seed);
    }
}

/* ---- The calibration ---- */

static const char *unit_of(const pw_fitted *f)
{
    if (f->kind == PW_FITTED_F0) return "Hz";
    if (f->kind != PW_FITTED_PART) return "";
    return f->name[0] == 'C' ? "F" : f->name[0] == 'L' ? "H" : f->name[0] == 'R' ? "ohm" : "";
}

static void put_fitted(const pw_fitted *f, pw_table *table)
{
    char value[PW_NUMBER_ROOM];
    const char *unit = unit_of(f);
    bool plain = f->kind == PW_FITTED_Q || f->kind == PW_FITTED_GAIN, held = f->held > 0.999999;
    pw_table_cell(table, "%s", f->name);
    for (int i = 0; i < 2; i++) {
        double v = i ? f->value : f->nominal;
        if (plain) pw_table_cell(table, "%.*g", i ? 6 : 4, v);
        else pw_table_cell(table, "%s", pw_si(value, v, unit, i ? 6 : 4));
    }
    pw_table_cell(table, "%+.3f %%", 100 * (f->value / f->nominal - 1));
    if (isnan(f->whole_error)) pw_table_cell(table, "%s", "not known");
    else pw_table_cell(table, "+- %.2g %%", 100 * f->whole_error / fabs(f->value));
    if (held) pw_table_cell(table, "%s", "held at nominal");
    else if (f->at_bound)
        pw_table_cell(table, "%s", "at the end of its tolerance: the data ask for more");
    else if (f->held > 0.01) pw_table_cell(table, "%.0f %% of it held", 100 * f->held);
    else pw_table_cell(table, "%s", "");
}

/* Directions as relative changes of the values, brought to echelon form (Gauss and Jordan): the
 * held ones span a space, and whatever basis a decomposition gives of it, these rows are the
 * same. */
static int held_rows(const pw_fit *fit, double row[][PW_MOST_FITTED])
{
    int n = fit->count, held = n - fit->found, done = 0;
    for (int k = 0; k < held; k++)
        for (int i = 0; i < n; i++) {
            double tolerance = fit->parameter[i].tolerance;
            row[k][i] = fit->direction[fit->found + k][i] * (tolerance > 0 ? tolerance : 0.1);
        }
    for (int i = 0; i < n && done < held; i++) {
        int best = done;
        double size = 0;
        for (int k = 0; k < held; k++)
            for (int j = 0; j < n; j++) size = fmax(size, fabs(row[k][j]));
        for (int k = done; k < held; k++)
            if (fabs(row[k][i]) > fabs(row[best][i])) best = k;
        if (fabs(row[best][i]) < 1e-4 * size) continue;
        for (int j = n - 1; j >= 0; j--) {
            double swap = row[best][j];
            row[best][j] = row[done][j];
            row[done][j] = swap;
        }
        for (int j = n - 1; j >= i; j--) row[done][j] /= row[done][i];
        for (int k = 0; k < held; k++)
            for (int j = n - 1; j >= i && k != done; j--) row[k][j] -= row[k][i] * row[done][j];
        done++;
    }
    return done;
}

static void put_held(const pw_fit *fit, pw_text *out)
{
    static double row[PW_MOST_FITTED][PW_MOST_FITTED];
    int rows = held_rows(fit, row);
    for (int k = 0; k < rows; k++) {
        pw_text_add(out, "  held, for the data do not show it:");
        for (int i = 0; i < fit->count; i++)
            if (fabs(row[k][i]) > 5e-4)
                pw_text_print(out, " %s %+.3g %%", fit->parameter[i].name, row[k][i]);
        pw_text_add(out, " together\n");
    }
}

static void put_fit(const pw_twin_found *found, pw_text *out)
{
    const pw_fit *fit = found->fit;
    char delay[PW_FIGURE_ROOM];
    pw_text_print(
        out, "\ncalibration: %d points, %d of %d combinations of parameters can be told apart\n",
        fit->points, fit->found, fit->count);
    static const char *const head[] = {"", "nominal", "fitted", "change", "standard error", ""};
    pw_table table = {.align = "lrrrrl"};
    for (int i = 0; i < 6; i++) pw_table_cell(&table, "%s", head[i]);
    for (int i = 0; i < fit->count; i++) put_fitted(&fit->parameter[i], &table);
    pw_table_print(&table, 2, out);
    put_held(fit, out);
    if (fit->correlation_most > 0.9)
        pw_text_print(out, "  %s and %s move together: their errors correlate by %.3f\n",
                      fit->parameter[fit->correlated[0]].name,
                      fit->parameter[fit->correlated[1]].name, fit->correlation_most);
    if (fit->delay)
        pw_text_print(out, "  delay of the board beside them: %s\n",
                      pw_figure(delay, fit->delay_s, "s"));
    pw_text_print(out,
                  "  rms error of the response %.4f dB before, %.4f dB after (largest %.4f dB)\n",
                  fit->before_db, fit->after_db, fit->after_most_db);
    if (found->written) pw_text_print(out, "Written: %s\n", found->written);
}

void pw_twin_text(const pw_twin_found *found, bool verbose, pw_text *out)
{
    const pw_results *r = found->results;
    char rate[PW_FIGURE_ROOM];
    pw_text_print(out, "%s at %s, %s: the board against its twin\n\n", r->stage->name,
                  pw_figure(rate, r->stage->rate_hz, "Hz"), pw_sample_word(r->realisation.sample));
    if (found->comparison) put_record(r, found->comparison, out);
    if (found->comparison) put_reference(found->comparison, r->stage->rate_hz, out);
    if (found->comparison) pw_text_add(out, "\n");
    if (found->points && found->points->count) {
        put_points(found->points, verbose, out);
        put_worst(found->points, out);
    }
    if (found->points) put_verdict(found->points, out);
    if (found->fit) put_fit(found, out);
}
