/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "twin/compare.h"

#include <float.h>
#include <inttypes.h>
#include <math.h>
#include <string.h>

#include "twin/align.h"
#include "twin/exact.h"
#include "twin/spectrum.h"

#define LEAST_FRAMES 16

/* ---- What the passes gather ---- */

/* Sums for the line y = offset + gain r, each about its first value. */
typedef struct line { double n, r0, y0, r, y, rr, ry, yy; } line;

static void line_add(line *l, double r, double y)
{
    if (l->n == 0) l->r0 = r, l->y0 = y;
    r -= l->r0, y -= l->y0;
    l->n++;
    l->r += r, l->y += y, l->rr += r * r, l->ry += r * y, l->yy += y * y;
}

static void line_solve(const line *l, double *gain, double *offset)
{
    double rr = l->rr - l->r * l->r / l->n, ry = l->ry - l->r * l->y / l->n;
    bool flat = rr <= 1e-20 * l->rr || rr <= 0;
    *gain = flat ? NAN : ry / rr;
    *offset = l->y0 + l->y / l->n - (flat ? 0 : *gain) * (l->r0 + l->r / l->n);
}

typedef struct tally { double sum; int64_t n; pw_residual out; } tally;

static void tally_add(tally *t, double error, int64_t frame)
{
    t->sum += error * error;
    t->n++;
    if (fabs(error) > t->out.peak) t->out.peak = fabs(error), t->out.peak_at = frame;
}

static pw_residual tally_end(tally *t)
{
    t->out.rms = t->n ? sqrt(t->sum / (double)t->n) : 0;
    return t->out;
}

/* Calls one for each frame from the skipped ones on. */
typedef void (*each_frame)(void *to, const pw_frame *frame, int64_t at);

static pw_status pass(pw_flow *flow, int64_t from, each_frame one, void *to)
{
    const pw_frame *frames;
    size_t got;
    int64_t at = 0;
    pw_status status = pw_flow_rewind(flow);
    while (!status) {
        status = pw_flow_next(flow, &frames, &got);
        if (status || !got) break;
        for (size_t i = 0; i < got; i++, at++)
            if (at >= from) one(to, &frames[i], at);
    }
    return status;
}

/* ---- How long the twin takes to forget ---- */

static int64_t settling(const pw_results *results, int64_t frames)
{
    double slowest = 0;
    const pw_roots *z = &results->digital.z;
    for (int i = 0; i < z->poles; i++) slowest = fmax(slowest, cabs(z->pole[i]));
    double samples = slowest >= 1 ? INFINITY : slowest > 0 ? log(1e-3) / log(slowest) : 1;
    return samples < (double)frames / 4 ? (int64_t)ceil(samples) : frames / 4;
}

/* ---- First pass: how much there is, and the delay in whole samples ---- */

static void to_lag(void *to, const pw_frame *f, int64_t at)
{
    (void)at;
    pw_lag_add(to, f->twin, f->output);
}

static pw_status first_pass(pw_flow *flow, pw_comparison *out, int *whole, bool *inverted)
{
    pw_lag lag;
    const pw_frame *frames;
    size_t got;
    pw_status status;
    pw_lag_begin(&lag);
    do {
        status = pw_flow_next(flow, &frames, &got);
        for (size_t i = 0; i < got && !status; i++) to_lag(&lag, &frames[i], 0);
    } while (!status && got);
    if (!status && flow->frames < LEAST_FRAMES)
        status = pw_record_wrong(flow->path, 0,
                                 "holds %" PRId64 " sample%s; expected at least %d to compare",
                                 flow->frames, flow->frames == 1 ? "" : "s", LEAST_FRAMES);
    if (!status) *whole = pw_lag_find(&lag, inverted);
    pw_lag_end(&lag);
    if (status) return status;
    out->frames = flow->frames;
    out->at_rest = flow->at_rest;
    out->skipped = flow->at_rest ? 0 : settling(flow->results, flow->frames);
    out->used = out->frames - out->skipped;
    out->flat_input = flow->flat_input;
    out->flat_output = flow->flat_output;
    out->clipped = flow->clipped;
    out->outside = flow->outside;
    out->railed = flow->railed;
    return PW_OK;
}

/* ---- Last passes: what is left ---- */

typedef struct leaving {
    pw_aligned aligned;
    bool shifts;                 /* else the two are compared as they stand */
    bool known;                  /* gain and offset are known; else sums are gathered */
    double gain, offset;
    line line, plain;
    tally raw, left;
} leaving;

static void leave(void *to, const pw_frame *f, int64_t at)
{
    leaving *l = to;
    double r = f->twin, y = f->output;
    if (!l->known) tally_add(&l->raw, y - r, at), line_add(&l->plain, r, y);
    if (l->shifts && !pw_aligned_add(&l->aligned, f->twin, f->output, &r, &y)) return;
    if (l->known)
        tally_add(&l->left, y - l->offset - (isnan(l->gain) ? 0 : l->gain * r),
                  at - (l->shifts ? l->aligned.whole_y : 0));
    else line_add(&l->line, r, y);
}

static double lsb_of(const pw_results *results)
{
    const pw_port *port = &results->stage->output;
    if (port->bits) return (port->high - port->low) / ldexp(1, port->bits);
    pw_sample sample = results->realisation.sample;
    return sample == PW_Q15   ? ldexp(port->full_scale, -15)
           : sample == PW_Q31 ? ldexp(port->full_scale, -31)
                              : NAN;
}

static pw_status residuals(pw_flow *flow, pw_comparison *out)
{
    leaving l = {.shifts = fabs(out->delay_samples) > 1e-9};
    pw_status status;
    for (int round = 0; round < 2; round++) {
        if (l.shifts) pw_aligned_begin(out->delay_samples, &l.aligned);
        status = pass(flow, out->skipped, leave, &l);
        if (l.shifts) pw_aligned_end(&l.aligned);
        if (status) return status;
        if (!l.known) line_solve(&l.line, &l.gain, &l.offset);
        l.known = true;
    }
    double n = l.plain.n;
    out->gain = l.gain;
    out->offset = l.offset;
    out->raw = tally_end(&l.raw);
    out->left = tally_end(&l.left);
    out->output_rms = sqrt(fmax(0, l.plain.yy / n - (l.plain.y / n) * (l.plain.y / n)));
    out->normalised = out->left.rms / out->output_rms;
    out->lsb = lsb_of(flow->results);
    return PW_OK;
}

/* A shift needs some samples more than it takes. */
static double usable_delay(double delay, int64_t used)
{
    return 4 * (fabs(delay) + 2 * PW_ALIGN_TAPS) < (double)used ? delay : 0;
}

/* ---- The exact analog stage beside it ---- */

typedef struct referring {
    pw_exact exact;
    const pw_results *results;
    pw_aligned aligned;
    int64_t skipped;
    tally error, error_aligned, board;
    bool shifts, begun;
} referring;

static void refer(void *to, const pw_frame *f, int64_t at)
{
    referring *r = to;
    const pw_stage *stage = r->results->stage;
    double u = f->input - stage->input.zero, late, moved;
    if (!r->begun) pw_exact_settle(&r->exact, u);
    r->begun = true;
    double y = stage->output.zero + pw_exact_step(&r->exact, u);
    if (stage->output.has_rails) y = fmin(fmax(y, stage->output.rail[0]), stage->output.rail[1]);
    if (at < r->skipped) return;
    tally_add(&r->error, f->twin - y, at);
    tally_add(&r->board, f->output - y, at);
    if (!r->shifts) tally_add(&r->error_aligned, f->twin - y, at);
    else if (pw_aligned_add(&r->aligned, f->twin, y, &late, &moved))
        tally_add(&r->error_aligned, late - moved, at - r->aligned.whole_y);
}

static pw_status refer_all(pw_flow *flow, pw_hold hold, pw_comparison *out)
{
    const pw_results *results = flow->results;
    const pw_stage *stage = results->stage;
    pw_reference_figures *f = &out->reference;
    bool linear = hold == PW_HOLD_LINEAR;
    double x = M_PI * stage->limits.band_hz[1] / stage->rate_hz;
    *f = (pw_reference_figures){.given = true,
                                .linear = linear,
                                .edge_hz = stage->limits.band_hz[1],
                                .hold_delay_samples = linear ? 0 : 0.5,
                                .edge_droop_db = 20 * log10(sin(x) / x) * (linear ? 2 : 1)};
    referring r = {.results = results, .skipped = out->skipped};
    r.shifts = !linear && usable_delay(0.5, out->used) > 0;
    pw_exact_begin(&results->analog, stage->rate_hz, linear, &r.exact);
    if (r.shifts) pw_aligned_begin(0.5, &r.aligned);
    pw_status status = pass(flow, 0, refer, &r);
    if (r.shifts) pw_aligned_end(&r.aligned);
    pw_exact_end(&r.exact);
    f->error = tally_end(&r.error);
    f->error_aligned = tally_end(&r.error_aligned);
    f->board = tally_end(&r.board);
    return status;
}

/* ---- The whole ---- */

/* Whole samples of delay are taken out first: a segment must hold the same piece of both. */
typedef struct spectral { pw_welch welch; pw_aligned aligned; } spectral;

static void to_welch(void *to, const pw_frame *f, int64_t at)
{
    spectral *s = to;
    double r, y;
    (void)at;
    if (pw_aligned_add(&s->aligned, f->twin, f->output, &r, &y))
        pw_welch_add(&s->welch, f->input, y, r);
}

/* out->spectra stays null where the record is too short. */
static pw_status spectra(pw_flow *flow, int whole, pw_arena *arena, pw_comparison *out)
{
    spectral s = {{0}, {0}};
    out->whole_delay = whole;
    int64_t left = out->used - 2 * PW_ALIGN_TAPS - (whole < 0 ? -(int64_t)whole : whole);
    out->segment = pw_spectrum_segment(left);
    if (!out->segment) return PW_OK;
    pw_welch_begin(out->segment, &s.welch);
    pw_aligned_begin(whole, &s.aligned);
    pw_status status = pass(flow, out->skipped, to_welch, &s);
    pw_aligned_end(&s.aligned);
    out->averages = pw_welch_averages(&s.welch);
    out->spectra = pw_arena_take(arena, sizeof *out->spectra);
    pw_welch_keep(&s.welch, arena, out->spectra);
    pw_welch_end(&s.welch);
    return status;
}

void pw_compare_again(const pw_results *results, const pw_roots *like, pw_arena *arena,
                      pw_comparison *comparison)
{
    if (comparison->spectra)
        pw_spectrum_points(results, like, comparison->spectra,
                           comparison->delay_samples - comparison->whole_delay, arena,
                           &comparison->points);
}

pw_status pw_compare_record(pw_flow *flow, pw_hold hold, pw_arena *arena, pw_comparison *out,
                            pw_messages *messages)
{
    int whole = 0;
    bool inverted = false;
    *out = (pw_comparison){.points = {.worst = -1}};
    pw_status status = first_pass(flow, out, &whole, &inverted);
    if (status) return status;
    status = spectra(flow, whole, arena, out);
    double delay = whole + (out->spectra ? pw_align_phase(out->spectra, inverted) : 0);
    out->delay_samples = usable_delay(delay, out->used);
    if (!status) status = residuals(flow, out);
    if (!status && out->spectra) {
        pw_compare_again(flow->results, &flow->results->analog, arena, out);
        status = pw_points_judge(flow->results, flow->quiet, PW_EVEN_SHARE, &out->points, messages);
    }
    if (!status && hold != PW_HOLD_NONE) status = refer_all(flow, hold, out);
    return status;
}
