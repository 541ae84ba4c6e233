/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "twin/flow.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/progress.h"

#define FLAT 4                   /* equal samples that count as a flat top */

/* ---- Flat tops ---- */

/* One end: the largest of the values (times sign), and the runs of it. */
typedef struct end_watch { double value; int64_t run, runs, samples; } end_watch;
struct pw_flat_watch { end_watch high, low; };

static void watch_end(end_watch *e, double v)
{
    if (v > e->value) *e = (end_watch){.value = v, .run = 1};
    else if (v < e->value) e->run = 0;
    else if (++e->run == FLAT) e->runs++, e->samples += FLAT;
    else if (e->run > FLAT) e->samples++;
}

static void watch_begin(struct pw_flat_watch *w)
{
    const end_watch nothing = {.value = -INFINITY, .run = 0};
    w->high = w->low = nothing;
}

static void watch(struct pw_flat_watch *w, double v)
{
    watch_end(&w->high, v);
    watch_end(&w->low, -v);
}

static pw_flat watch_result(const struct pw_flat_watch *w)
{
    pw_flat flat = {.least = -w->low.value, .most = w->high.value};
    if (flat.most > flat.least) {
        flat.runs = w->high.runs + w->low.runs;
        flat.samples = w->high.samples + w->low.samples;
    }
    return flat;
}

/* ---- Passes ---- */

static pw_values values_of(const pw_flow *flow)
{
    return flow->record.wav ? PW_VALUES_FULL_SCALE
           : flow->samples  ? PW_VALUES_SAMPLES
                            : PW_VALUES_VOLTS;
}

static pw_status begin_pass(pw_flow *flow)
{
    const pw_results *r = flow->results;
    pw_status status = pw_record_open(flow->path, PW_RECORD_PAIR, r->stage->rate_hz, &flow->record);
    if (status) return status;
    flow->open = true;
    flow->at = 0;
    pw_channels_free(&flow->channels);
    pw_channels_make(&r->realisation, r->stage, 1, values_of(flow), &flow->channels);
    return PW_OK;
}

static void end_pass(pw_flow *flow)
{
    if (!flow->counted) {
        flow->counted = true;
        flow->frames = flow->at;
        flow->flat_input = watch_result(&flow->watch[0]);
        flow->flat_output = watch_result(&flow->watch[1]);
        flow->clipped = pw_channels_clipped(&flow->channels);
        flow->outside = flow->channels.outside;
    }
    pw_record_close(&flow->record);
    flow->open = false;
}

pw_status pw_flow_open(const pw_results *results, const char *path, bool samples, bool quiet,
                       pw_flow *out)
{
    *out = (pw_flow){
        .results = results, .path = path, .samples = samples, .quiet = quiet, .kept = true};
    out->raw = pw_take(2 * PW_FRAMES * sizeof *out->raw);
    out->played = pw_take(PW_FRAMES * sizeof *out->played);
    out->block = pw_take(PW_FRAMES * sizeof *out->block);
    out->watch = pw_take(2 * sizeof *out->watch);
    out->progress = pw_take(sizeof *out->progress);
    for (int i = 0; i < 2; i++) {
        watch_begin(&out->watch[i]);
    }
    pw_status status = begin_pass(out);
    pw_progress_begin(out->progress, "replaying", out->record.size,
                      out->record.wav ? "samples" : "B", quiet);
    return status;
}

pw_status pw_flow_rewind(pw_flow *flow)
{
    flow->at = 0;
    if (flow->open) end_pass(flow);
    if (flow->kept) return PW_OK;
    pw_progress_begin(flow->progress, "comparing", flow->record.size,
                      flow->record.wav ? "samples" : "B", flow->quiet);
    return begin_pass(flow);
}

/* ---- Frames ---- */

static bool is_at_rest(const double *raw, size_t frames)
{
    size_t n = frames < 8 ? frames : 8;
    for (size_t i = 1; i < n; i++)
        if (raw[2 * i] != raw[0]) return false;
    return n == 8;
}

static double to_volts(double v, const pw_scale *scale, const pw_port *port)
{
    double one = scale->fixed ? -scale->low : 1;
    return port->zero + port->full_scale * ((v - scale->zero) / scale->unit) / one;
}

static double within_rails(pw_flow *flow, double v)
{
    const pw_port *port = &flow->results->stage->output;
    if (!port->has_rails || (v >= port->rail[0] && v <= port->rail[1])) return v;
    if (!flow->counted) flow->railed++;
    return v < port->rail[0] ? port->rail[0] : port->rail[1];
}

static void fill(pw_flow *flow, size_t got)
{
    const pw_stage *stage = flow->results->stage;
    for (size_t i = 0; i < got; i++) {
        pw_frame *f = &flow->block[i];
        if (!flow->counted) {
            watch(&flow->watch[0], flow->raw[2 * i]);
            watch(&flow->watch[1], flow->raw[2 * i + 1]);
        }
        f->input = to_volts(flow->raw[2 * i], &flow->channels.in, &stage->input);
        f->output = to_volts(flow->raw[2 * i + 1], &flow->channels.out, &stage->output);
        f->twin =
            within_rails(flow, to_volts(flow->played[i], &flow->channels.out, &stage->output));
    }
}

static void keep(pw_flow *flow, size_t got)
{
    if (!flow->kept || flow->counted) return;
    if (flow->at + (int64_t)got > PW_FLOW_KEPT) {
        free(flow->kept_frames);
        flow->kept_frames = NULL;
        flow->kept = false;
        return;
    }
    if (!flow->kept_frames) flow->kept_frames = pw_take(PW_FRAMES * sizeof *flow->kept_frames);
    size_t n = (size_t)flow->at;
    if (n && (n & (n - 1)) == 0)         /* doubles at every power of two */
        flow->kept_frames = pw_retake(flow->kept_frames, 2 * n * sizeof *flow->kept_frames);
    memcpy(flow->kept_frames + n, flow->block, got * sizeof *flow->block);
}

static pw_status next_read(pw_flow *flow, const pw_frame **frames, size_t *got)
{
    pw_status status = pw_record_read(&flow->record, flow->raw, PW_FRAMES, got);
    pw_progress_step(flow->progress, flow->record.done);
    if (status || !*got) {
        pw_progress_end(flow->progress);
        if (!status) end_pass(flow);
        return status;
    }
    if (flow->at == 0) {
        flow->at_rest = is_at_rest(flow->raw, *got);
        pw_channels_settle(&flow->channels, 0, flow->raw[0]);
    }
    pw_channels_run(&flow->channels, flow->raw, 2, flow->played, *got);
    fill(flow, *got);
    keep(flow, *got);
    flow->at += (int64_t)*got;
    *frames = flow->block;
    return PW_OK;
}

pw_status pw_flow_next(pw_flow *flow, const pw_frame **frames, size_t *got)
{
    if (flow->open) return next_read(flow, frames, got);
    *got = 0;
    if (!flow->kept || flow->at >= flow->frames) return PW_OK;
    int64_t left = flow->frames - flow->at;
    *got = left < PW_FRAMES ? (size_t)left : PW_FRAMES;
    *frames = flow->kept_frames + flow->at;
    flow->at += (int64_t)*got;
    return PW_OK;
}

void pw_flow_close(pw_flow *flow)
{
    if (flow->progress) pw_progress_end(flow->progress);
    if (flow->open) pw_record_close(&flow->record);
    pw_channels_free(&flow->channels);
    free(flow->raw);
    free(flow->played);
    free(flow->block);
    free(flow->kept_frames);
    free(flow->watch);
    free(flow->progress);
    *flow = (pw_flow){0};
}
