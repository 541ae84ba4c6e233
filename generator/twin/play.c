/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "twin/play.h"

#include <inttypes.h>
#include <math.h>
#include <sndfile.h>
#include <stdlib.h>
#include <string.h>
#include <strings.h>

#include "base/progress.h"
#include "report/figures.h"
#include "report/json_value.h"
#include "twin/channels.h"
#include "twin/record.h"
#include "twin/sink.h"

typedef struct playing {
    pw_record record;
    pw_channels channels;
    pw_sink sink;
    SNDFILE *sound;
    double *in, *out;
} playing;

static bool ends_in_wav(const char *path)
{
    size_t n = strlen(path);
    return n > 4 && !strcasecmp(path + n - 4, ".wav");
}

/* ---- Writing ---- */

static void put_names(const playing *p, const pw_results *results)
{
    fprintf(p->sink.file, "# %s by polewright twin --play, at %.17g Hz\n", results->stage->name,
            results->stage->rate_hz);
    for (int i = 0; i < p->record.columns; i++)
        fprintf(p->sink.file, "%s%s", i ? "," : "", p->record.name[i]);
    for (int i = 0; i < p->record.columns; i++) {
        const char *rest = p->record.name[i] + strlen("input");
        fprintf(p->sink.file, ",output%s", rest);
    }
    fputc('\n', p->sink.file);
}

/* single: the value is a float32. */
static void put_value(FILE *file, double v, bool single)
{
    char number[PW_NUMBER_ROOM];
    bool whole = v == floor(v) && fabs(v) < 1e15 && !(v == 0 && signbit(v));
    if (whole) fprintf(file, "%.0f", v);
    else fputs(single ? pw_shortest_float(number, (float)v) : pw_shortest(number, v), file);
}

static void put_frames(const playing *p, size_t frames)
{
    FILE *file = p->sink.file;
    size_t n = (size_t)p->record.columns;
    const pw_scale *out = &p->channels.out;
    bool single = out->single && out->unit == 1 && out->zero == 0;
    for (size_t k = 0; k < frames * n; k += n) {
        for (size_t i = 0; i < n; i++) put_value(file, p->in[k + i], false), fputc(',', file);
        for (size_t i = 0; i < n; i++)
            put_value(file, p->out[k + i], single), fputc(i + 1 < n ? ',' : '\n', file);
    }
}

static int sound_format(pw_sample sample)
{
    static const int form[] = {[PW_FLOAT32] = SF_FORMAT_FLOAT, [PW_FLOAT64] = SF_FORMAT_DOUBLE,
                               [PW_Q31] = SF_FORMAT_PCM_32, [PW_Q15] = SF_FORMAT_PCM_16};
    return SF_FORMAT_RF64 | form[sample];
}

/* RF64 becomes plain WAV when the file closes below 4 GiB. */
static pw_status open_sound(playing *p, const pw_results *results)
{
    SF_INFO info = {.samplerate = (int)lrint(results->stage->rate_hz),
                    .channels = p->record.columns,
                    .format = sound_format(results->realisation.sample)};
    p->sound = sf_open(p->sink.beside, SFM_WRITE, &info);
    if (!p->sound) {
        fprintf(stderr, "polewright: cannot write %s: %s\n", p->sink.path, sf_strerror(NULL));
        return PW_FAILED;
    }
    sf_command(p->sound, SFC_RF64_AUTO_DOWNGRADE, NULL, SF_TRUE);
    sf_command(p->sound, SFC_SET_ADD_PEAK_CHUNK, NULL, SF_FALSE);   /* it holds the time of day */
    return PW_OK;
}

static pw_status put(playing *p, const pw_results *results, size_t frames)
{
    if (!p->sound) {
        put_frames(p, frames);
        return PW_OK;
    }
    sf_count_t n = (sf_count_t)(frames * (size_t)p->channels.count), done;
    if (results->realisation.sample == PW_Q15 || results->realisation.sample == PW_Q31) {
        int32_t *word = (int32_t *)p->channels.samples;
        done = 0;
        for (sf_count_t at = 0, size; at < n; at += size) {
            size = n - at < PW_FRAMES ? n - at : PW_FRAMES;
            for (sf_count_t i = 0; i < size; i++)
                word[i] = (int32_t)ldexp(p->out[at + i], 31);
            done += sf_write_int(p->sound, word, size);
        }
    } else done = sf_write_double(p->sound, p->out, n);
    if (done == n) return PW_OK;
    fprintf(stderr, "polewright: cannot write %s: %s\n", p->sink.path, sf_strerror(p->sound));
    return PW_FAILED;
}

/* ---- The run ---- */

static pw_status check_samples(const playing *p, size_t frames)
{
    const pw_scale *s = &p->channels.in;
    if (!s->fixed || s->unit != 1) return PW_OK;
    for (size_t i = 0; i < frames * (size_t)p->record.columns; i++)
        if (p->in[i] != floor(p->in[i]))
            return pw_record_wrong(
                p->record.path, 0,
                "holds %.9g (frame %" PRId64 "); with --samples the format asks for "
                "whole numbers from %.0f to %.0f",
                p->in[i], p->record.frames - (int64_t)frames + (int64_t)i / p->record.columns,
                s->low, s->high);
    return PW_OK;
}

static pw_status all_frames(playing *p, const pw_results *results, pw_play *play)
{
    pw_progress progress;
    pw_status status;
    size_t got;
    pw_progress_begin(&progress, "replaying", p->record.size, p->record.wav ? "samples" : "B",
                      play->quiet);
    for (;;) {
        status = pw_record_read(&p->record, p->in, PW_FRAMES, &got);
        if (!status && got) status = check_samples(p, got);
        if (status || !got) break;
        pw_channels_run(&p->channels, p->in, p->record.columns, p->out, got);
        status = put(p, results, got);
        if (status) break;
        pw_progress_step(&progress, p->record.done);
    }
    pw_progress_end(&progress);
    if (!status && !p->record.frames)
        status = pw_record_wrong(p->record.path, 0, "holds no samples; expected at least one");
    return status;
}

static pw_status write_all(playing *p, const pw_results *results, pw_play *play)
{
    bool wav = ends_in_wav(play->out);
    pw_values values = p->record.wav || wav ? PW_VALUES_FULL_SCALE
                     : play->samples ? PW_VALUES_SAMPLES : PW_VALUES_VOLTS;
    pw_channels_make(&results->realisation, results->stage, p->record.columns, values,
                     &p->channels);
    /* From CSV to WAV the inputs are volts or samples; only the outputs are of full scale. */
    if (!p->record.wav)
        p->channels.in = pw_scale_of(results->realisation.sample, &results->stage->input,
                                     play->samples ? PW_VALUES_SAMPLES : PW_VALUES_VOLTS);
    p->in = pw_take(PW_FRAMES * (size_t)p->record.columns * sizeof *p->in);
    p->out = pw_take(PW_FRAMES * (size_t)p->record.columns * sizeof *p->out);
    pw_status status = pw_sink_open(play->out, &p->sink);
    if (!status && wav) status = open_sound(p, results);
    if (!status && !wav) put_names(p, results);
    if (!status) status = all_frames(p, results, play);
    if (p->sound && sf_close(p->sound) && !status) {
        fprintf(stderr, "polewright: cannot write %s\n", play->out);
        status = PW_FAILED;
    }
    if (!status) status = pw_sink_finish(&p->sink);
    pw_sink_abandon(&p->sink);
    play->channels = p->record.columns;
    play->frames = p->record.frames;
    play->clipped = pw_channels_clipped(&p->channels);
    play->outside = p->channels.outside;
    pw_channels_free(&p->channels);
    return status;
}

pw_status pw_play_run(const pw_results *results, pw_play *play)
{
    playing p = {0};
    pw_status status =
        pw_record_open(play->in, PW_RECORD_INPUTS, results->stage->rate_hz, &p.record);
    if (!status) status = write_all(&p, results, play);
    free(p.in);
    free(p.out);
    pw_record_close(&p.record);
    return status;
}

static void say_json(const pw_results *results, const pw_play *play, pw_text *out)
{
    json_t *o = json_object();
    pw_json_put(o, "format", json_string("polewright-play-1"));
    pw_json_put(o, "stage", pw_json_text(results->stage->name));
    pw_json_put(o, "rate_hz", pw_json_number(results->stage->rate_hz));
    pw_json_put(o, "sample", json_string(pw_sample_word(results->realisation.sample)));
    pw_json_put(o, "channels", json_integer(play->channels));
    pw_json_put(o, "frames", json_integer(play->frames));
    pw_json_put(o, "clipped", json_integer((json_int_t)play->clipped));
    pw_json_put(o, "inputs_beyond_full_scale", json_integer((json_int_t)play->outside));
    pw_json_put(o, "written", pw_json_text(play->out));
    pw_json_write(o, out);
}

void pw_play_say(const pw_results *results, const pw_play *play, bool json, pw_text *out)
{
    char frames[PW_FIGURE_ROOM], channels[PW_FIGURE_ROOM];
    if (json) {
        say_json(results, play, out);
        return;
    }
    pw_text_print(out, "%s of %s through %s, bit for bit: %s\n",
                  pw_samples(frames, (double)play->frames, results->stage->rate_hz),
                  pw_count(channels, play->channels, "channel"),
                  pw_sample_word(results->realisation.sample), play->out);
    if (play->clipped) pw_text_print(out, "nodes clipped %" PRIu64 " times\n", play->clipped);
    if (play->outside)
        pw_text_print(out, "%" PRIu64 " inputs lay beyond full scale and were clamped\n",
                      play->outside);
}
