/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "twin/channels.h"

#include <stdlib.h>

void pw_channels_make(const pw_realisation *realisation, const pw_stage *stage, int count,
                      pw_values values, pw_channels *out)
{
    *out = (pw_channels){.realisation = realisation, .count = count};
    out->sim = pw_take((size_t)count * sizeof *out->sim);
    out->samples = pw_take(PW_FRAMES * sizeof(double));
    out->in = pw_scale_of(realisation->sample, &stage->input, values);
    out->out = pw_scale_of(realisation->sample, &stage->output, values);
    for (int i = 0; i < count; i++) pw_simulation_reset(&out->sim[i], realisation);
}

void pw_channels_free(pw_channels *channels)
{
    free(channels->sim);
    free(channels->samples);
    *channels = (pw_channels){0};
}

#define CHANNEL(NAME, REAL)                                                                        \
    static void channel_##NAME(pw_channels *c, int i, const double *in, int columns, double *out,  \
                               size_t frames)                                                      \
    {                                                                                              \
        REAL *s = c->samples;                                                                      \
        for (size_t k = 0; k < frames; k++)                                                        \
            s[k] = (REAL)pw_scale_sample(&c->in, in[k * (size_t)columns], &c->outside);            \
        pw_replay_##NAME(&c->sim[i], s, s, frames);                                                \
        for (size_t k = 0; k < frames; k++)                                                        \
            out[k * (size_t)c->count] = pw_scale_value(&c->out, (double)s[k]);                     \
    }

CHANNEL(words, int32_t)
CHANNEL(float32, float)
CHANNEL(float64, double)

void pw_channels_run(pw_channels *channels, const double *in, int in_columns, double *out,
                     size_t frames)
{
    for (int i = 0; i < channels->count; i++) {
        if (channels->in.fixed) channel_words(channels, i, in + i, in_columns, out + i, frames);
        else if (channels->in.single)
            channel_float32(channels, i, in + i, in_columns, out + i, frames);
        else channel_float64(channels, i, in + i, in_columns, out + i, frames);
    }
}

void pw_channels_settle(pw_channels *channels, int channel, double value)
{
    uint64_t unheard = 0;
    pw_simulation_settle(&channels->sim[channel], pw_scale_sample(&channels->in, value, &unheard));
}

uint64_t pw_channels_clipped(const pw_channels *channels)
{
    uint64_t sum = 0;
    for (int i = 0; i < channels->count; i++) sum += channels->sim[i].clipped;
    return sum;
}
