/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/plots.h"

#include <math.h>
#include <stdio.h>

#include "analog/spread.h"
#include "report/gnuplot.h"
#include "report/phrases.h"
#include "report/plot_script.h"

#define DEEPEST 100.0         /* dB below the top that a level axis shows at most */

/* ---- response ---- */

/* The analog phase of row i without jumps: turn is the sum of whole turns so far. */
static double unturned(const pw_response *r, int i, double *turn)
{
    double phase = r->row[i].analog_deg;
    if (i) *turn -= 360 * round((phase - r->row[i - 1].analog_deg) / 360);
    return phase + *turn;
}

/* Columns: Hz, analog dB, digital dB, analog degrees without jumps, digital degrees beside them,
 * error dB, error degrees, analog delay, digital delay. */
static void add_response(const pw_response *r, pw_text *script)
{
    double turn = 0;
    pw_text_add(script, "$response << EOD\n");
    for (int i = 0; i < r->rows; i++) {
        const pw_response_row *row = &r->row[i];
        double analog = unturned(r, i, &turn);
        double error = remainder(row->digital_deg - row->analog_deg, 360);
        const double column[] = {row->hz, row->analog_db, row->digital_db, analog, analog + error,
                                 row->digital_db - row->analog_db, error, row->analog_delay_s,
                                 row->digital_delay_s};
        for (size_t k = 0; k < sizeof column / sizeof *column; k++)
            pw_script_number(column[k], script);
        pw_text_add(script, "\n");
    }
    pw_text_add(script, "EOD\n");
}

/* Faint upright lines at the ends of the band. */
static void add_band(const pw_response *r, pw_text *script)
{
    for (int i = 0; i < 2; i++) {
        pw_text_print(script,
                      "set arrow %d from first %.9g, graph 0 to first %.9g, graph 1 nohead lc",
                      i + 1, r->band_hz[i], r->band_hz[i]);
        pw_script_color(PW_ROLE_EDGE, script);
        pw_text_add(script, "\n");
    }
}

static void level_range(const pw_response *r, double *low, double *high)
{
    *low = INFINITY;
    *high = -INFINITY;
    for (int i = 0; i < r->rows; i++) {
        const double db[] = {r->row[i].analog_db, r->row[i].digital_db};
        for (int k = 0; k < 2; k++) {
            if (!isfinite(db[k])) continue;
            *low = fmin(*low, db[k]);
            *high = fmax(*high, db[k]);
        }
    }
    *high += 1;
    *low = fmax(*low - 1, *high - DEEPEST);
}

/* Whole turns between the spread's phase and that of the response, at the spread's first row. */
static double turns_between(const pw_spread *s, const pw_response *r)
{
    double turn = 0, phase = 0;
    for (int i = 0; i < r->rows && (!i || r->row[i].hz <= s->row[0].hz); i++)
        phase = unturned(r, i, &turn);
    return 360 * round((phase - s->row[0].deg.nominal) / 360);
}

/* The span of the parts' tolerances as an area under the curves. True where there is one. */
static bool add_envelope(const pw_results *results, pw_text *script)
{
    const pw_spread *s = results->spread;
    if (!s || !s->rows) return false;
    double turns = turns_between(s, &results->response);
    pw_text_add(script, "$envelope << EOD\n");
    for (int i = 0; i < s->rows; i++) {
        const pw_spread_row *row = &s->row[i];
        pw_script_number(row->hz, script);
        pw_script_number(fmin(row->db.low, row->db.corner_low), script);
        pw_script_number(fmax(row->db.high, row->db.corner_high), script);
        pw_script_number(turns + fmin(row->deg.low, row->deg.corner_low), script);
        pw_script_number(turns + fmax(row->deg.high, row->deg.corner_high), script);
        pw_text_add(script, "\n");
    }
    pw_text_add(script, "EOD\n");
    return true;
}

static void add_area(const char *block, const char *columns, pw_role role, pw_text *script)
{
    pw_text_print(script, "$%s using %s with filledcurves fs solid noborder fc", block, columns);
    pw_script_color(role, script);
    pw_text_add(script, " notitle, ");
}

/* The limit as an area over the band, under the curve; the axis reaches a little beyond both. */
static double add_limit(const pw_response *r, const pw_given *limit, pw_text *script)
{
    double most = r->total.magnitude_db.max;
    if (limit->given) {
        pw_text_print(script, "$limit << EOD\n%.9g %.9g %.9g\n%.9g %.9g %.9g\nEOD\n", r->band_hz[0],
                      -limit->value, limit->value, r->band_hz[1], -limit->value, limit->value);
        most = fmax(most, limit->value);
    }
    return isfinite(most) && most > 0 ? most * 1.5 : 1e-6;
}

/* Whole steps of angles that people think in. */
static void add_phase_axis(const pw_response *r, pw_text *script)
{
    static const double steps[] = {1, 5, 15, 30, 45, 90, 180, 360, 720, 1440, 2880};
    double low = INFINITY, high = -INFINITY, turn = 0, step = 0;
    for (int i = 0; i < r->rows; i++) {
        double phase = unturned(r, i, &turn);
        double other = phase + remainder(r->row[i].digital_deg - r->row[i].analog_deg, 360);
        low = fmin(low, fmin(phase, other));
        high = fmax(high, fmax(phase, other));
    }
    for (size_t k = 0; k < sizeof steps / sizeof *steps && step < (high - low) / 4; k++)
        step = steps[k];
    low = floor(low / step - 0.01) * step;
    pw_script_y("phase, degrees", low, ceil(high / step + 0.01) * step, script);
    pw_text_print(script, "set ytics %.9g,%.9g\n", low, step);
}

static void add_panels(const pw_results *results, pw_text *script)
{
    const pw_response *r = &results->response;
    const pw_given *limit = &results->stage->limits.magnitude_db;
    double low, high, from = r->row[0].hz, to = r->row[r->rows - 1].hz;
    bool envelope = add_envelope(results, script);
    level_range(r, &low, &high);
    pw_script_frame(PW_PLOT_RESPONSE, 26, 210, script);
    pw_script_log_x(from, to, false, "", script);
    pw_script_y("magnitude, dB", low, high, script);
    pw_text_add(script, "plot ");
    if (envelope) add_area("envelope", "1:2:3", PW_ROLE_ENVELOPE, script);
    pw_text_add(script, "$response");
    pw_script_line("1:2", PW_ROLE_ANALOG, script);
    pw_text_add(script, ", $response");
    pw_script_line("1:3", PW_ROLE_DIGITAL, script);
    pw_text_add(script, "\n");
    pw_script_frame(PW_PLOT_RESPONSE, 246, 376, script);
    add_phase_axis(r, script);
    pw_text_add(script, "plot ");
    if (envelope) add_area("envelope", "1:4:5", PW_ROLE_ENVELOPE, script);
    pw_text_add(script, "$response");
    pw_script_line("1:4", PW_ROLE_ANALOG, script);
    pw_text_add(script, ", $response");
    pw_script_line("1:5", PW_ROLE_DIGITAL, script);
    pw_text_add(script, "\n");
    double most = add_limit(r, limit, script);
    pw_script_frame(PW_PLOT_RESPONSE, 412, 540, script);
    pw_script_log_x(from, to, true, "frequency, Hz", script);
    pw_script_y("digital \342\210\222 analog, dB", -most, most, script);
    pw_text_add(script, "plot ");
    if (limit->given) add_area("limit", "1:2:3", PW_ROLE_LIMIT, script);
    pw_text_add(script, "$response");
    pw_script_line("1:6", PW_ROLE_ERROR, script);
    pw_text_add(script, "\n");
}

static void add_response_plot(const pw_results *results, pw_text *script)
{
    pw_script_open(PW_PLOT_RESPONSE, script);
    add_response(&results->response, script);
    add_band(&results->response, script);
    pw_text_add(script, "set multiplot\n");
    add_panels(results, script);
    pw_text_add(script, "unset multiplot\n");
    pw_script_close(script);
}

/* ---- delay ---- */

/* A unit in which the values of a curve are neither tiny nor huge. */
static double time_unit(double most, const char **name)
{
    static const char *const names[] = {"ns", "\302\265s", "ms", "s"};
    int step = (int)floor(log10(fmax(most, 1e-12)) / 3) + 3;
    step = step < 0 ? 0 : step > 3 ? 3 : step;
    *name = names[step];
    return pow(10, 3 * (step - 3));
}

static void add_delay_plot(const pw_results *results, pw_text *script)
{
    const pw_response *r = &results->response;
    double most = 0;
    char title[60], columns[40];
    const char *name;
    for (int i = 0; i < r->rows; i++) most = fmax(most, fabs(r->row[i].analog_delay_s));
    double unit = time_unit(most, &name);
    pw_script_open(PW_PLOT_DELAY, script);
    add_band(r, script);
    pw_script_frame(PW_PLOT_DELAY, 26, 258, script);
    pw_script_log_x(r->row[0].hz, r->row[r->rows - 1].hz, true, "frequency, Hz", script);
    snprintf(title, sizeof title, "group delay, %s", name);
    pw_script_y(title, 0, 0, script);
    pw_text_add(script, "plot $response");
    snprintf(columns, sizeof columns, "1:($8/%g)", unit);
    pw_script_line(columns, PW_ROLE_ANALOG, script);
    pw_text_add(script, ", $response");
    snprintf(columns, sizeof columns, "1:($9/%g)", unit);
    pw_script_line(columns, PW_ROLE_DIGITAL, script);
    pw_text_add(script, "\n");
    pw_script_close(script);
}

/* ---- step ---- */

static void add_curve(const char *name, const double *x, double unit, const double *y, int n,
                      pw_text *script)
{
    pw_text_print(script, "$%s << EOD\n", name);
    for (int i = 0; i < n; i++) {
        pw_script_number(x[i] / unit, script);
        pw_script_number(y[i], script);
        pw_text_add(script, "\n");
    }
    pw_text_add(script, "EOD\n");
}

static void add_step_plot(const pw_step_curve *c, double rate_hz, pw_text *script)
{
    const char *name;
    char title[60];
    double last = c->analog_t[c->analogs - 1], unit = time_unit(last, &name);
    pw_script_open(PW_PLOT_STEP, script);
    add_curve("analogstep", c->analog_t, unit, c->analog, c->analogs, script);
    add_curve("digitalstep", c->digital_t, unit, c->digital, c->digitals, script);
    pw_script_frame(PW_PLOT_STEP, 26, 258, script);
    snprintf(title, sizeof title, "time, %s", name);
    if (c->logarithmic) pw_script_log_x(0.5 / rate_hz / unit, last / unit, true, title, script);
    else {
        pw_text_print(script, "set xrange [0:%.9g]\nset xtics scale 0.6 tc", last / unit);
        pw_script_color(PW_ROLE_TEXT, script);
        pw_text_print(script, "\nset xlabel '%s' offset 0,0.4 tc", title);
        pw_script_color(PW_ROLE_TEXT, script);
        pw_text_add(script, "\n");
    }
    pw_script_y("output for a step of 1 V, V", 0, 0, script);
    pw_text_add(script, "set offsets 0,0,graph 0.04,graph 0.04\nplot $analogstep");
    pw_script_line("1:2", PW_ROLE_ANALOG, script);
    pw_text_print(script, ", $digitalstep using 1:2 with %s lw 1 lc", c->digitals < 130 ? "steps"
                  : "lines");
    pw_script_color(PW_ROLE_DIGITAL, script);
    pw_text_add(script, " notitle\n");
    pw_script_close(script);
}

/* ---- noise ---- */

static void noise_range(const pw_noise_curve *c, double full, double *low, double *high)
{
    *low = INFINITY;
    *high = -INFINITY;
    for (int i = 0; i < c->points; i++) {
        const double db[] = {10 * log10(c->input[i] / full), 10 * log10(c->round_off[i] / full)};
        for (int k = 0; k < 2; k++) {
            if (!isfinite(db[k])) continue;
            *low = fmin(*low, db[k]);
            *high = fmax(*high, db[k]);
        }
    }
    *low = floor(fmax(*low - 2, *high - DEEPEST) / 10) * 10;
    *high = ceil((*high + 2) / 10) * 10;
}

/* dB of the density per Hz against the power of a full-scale sine. */
static void add_noise_plot(const pw_results *results, const pw_noise_curve *c, pw_text *script)
{
    int bits = results->realisation.sample == PW_Q15 ? 15 : 31;
    double full = ldexp(1, 2 * bits) / 2, low, high;
    pw_script_open(PW_PLOT_NOISE, script);
    pw_text_add(script, "$noise << EOD\n");
    for (int i = 0; i < c->points; i++) {
        pw_script_number(c->hz[i], script);
        pw_script_number(10 * log10(c->input[i] / full), script);
        pw_script_number(10 * log10(c->round_off[i] / full), script);
        pw_text_add(script, "\n");
    }
    pw_text_add(script, "EOD\n");
    pw_script_frame(PW_PLOT_NOISE, 26, 258, script);
    pw_script_log_x(c->hz[0], c->hz[c->points - 1], true, "frequency, Hz", script);
    noise_range(c, full, &low, &high);
    pw_script_y("round-off, dBFS in 1 Hz", low, high, script);
    pw_text_add(script, "plot $noise");
    pw_script_line("1:2", PW_ROLE_ERROR, script);
    pw_text_add(script, ", $noise");
    pw_script_line("1:3", PW_ROLE_DIGITAL, script);
    pw_text_add(script, "\n");
    pw_script_close(script);
}

/* ---- all of them ---- */

pw_status pw_plots_draw(const pw_results *results, pw_plots *out)
{
    static pw_step_curve step;   /* some kilobytes: not for the stack */
    static pw_noise_curve noise;
    pw_text script = {0}, drawn = {0};
    *out = (pw_plots){.wanted = true, .span_hz = {results->response.row[0].hz,
                                  results->response.row[results->response.rows - 1].hz}};
    pw_status status = pw_curve_step(results, &step);
    if (status) return status;
    pw_curve_noise(results, &noise);
    out->step_logarithmic = step.logarithmic;
    add_response_plot(results, &script);
    add_delay_plot(results, &script);
    add_step_plot(&step, results->stage->rate_hz, &script);
    pw_script_s_plane(results, &out->plane_compressed, &script);
    pw_script_z_plane(results, &script);
    if (noise.points) add_noise_plot(results, &noise, &script);
    out->drawn = pw_gnuplot(&script, &drawn);
    const char *at = pw_text_string(&drawn);
    for (int i = 0; out->drawn && i < PW_PLOTS - !noise.points; i++)
        out->drawn = pw_svg_take(&at, &out->body[i]);
    pw_text_free(&script);
    pw_text_free(&drawn);
    return PW_OK;
}

void pw_plots_free(pw_plots *plots)
{
    for (int i = 0; i < PW_PLOTS; i++) pw_text_free(&plots->body[i]);
}
