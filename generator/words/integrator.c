/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How soon an integrator reaches its clamp. */
#include "words/proof.h"
#include "words/step.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>
#include "base/arena.h"

#define RUN 400000L              /* samples that are stepped; the rest is extrapolated */

typedef struct reach { double worst, code; } reach;   /* samples; INFINITY: never */

/* m with sum + h m + d m^2 / 2 = target. */
static double extrapolate(double sum, double h, double d, double target)
{
    double left = target - sum;
    if (fabs(d) * left > 1e-9 * h * h)
        return d > 0 ? (sqrt(h * h + 2 * d * left) - h) / d : INFINITY;
    return h > 0 ? left / h : INFINITY;
}

/* Whether a constant input of one code is lost in rounding on its way: a bit-true run that should
 * move the output by eight LSB moves it by less than four. */
static bool stands_still(const pw_format *format, const pw_realisation *r, int k,
                         double samples_to_clip)
{
    int64_t code = llround(r->input_code / format->lsb);
    int64_t state[PW_MAX_SECTIONS][6] = {{0}}, y = 0;
    double samples = 8 * samples_to_clip * format->lsb;
    if (!(samples < RUN))
        samples = RUN;           /* then anything short of what it should be counts */
    double wanted = samples / (samples_to_clip * format->lsb) / 2;
    for (long n = 0; n < (long)samples + 64; n++) {
        y = code;
        for (int i = 0; i <= k; i++)
            y = pw_step_section(format, r->wrap, &r->section[i], state[i], y, NULL);
    }
    return wanted >= 0.6 && (double)(y < 0 ? -y : y) < wanted;
}

/* The response of sections 0..k to an impulse: |h| times the peak adds up for the worst input, h
 * times one code for a constant one. */
static reach find_reach(const pw_line *line, int k, double peak, double code)
{
    double state[PW_MAX_SECTIONS][4] = {{0}}, size = 0, step = 0, h = 0, before = 0;
    reach out = {NAN, NAN};
    for (long n = 0; n < RUN && (isnan(out.worst) || isnan(out.code)); n++) {
        double v = n == 0;
        for (int i = 0; i <= k; i++) {
            const pw_line *s = &line[i];
            double *q = state[i], y;
            if (s->coupled) {
                double u1 = q[0], u2 = q[1];
                y = (double)(s->c1 * u1 + s->c2 * u2 + s->d * v);
                q[0] = (double)(s->sigma * u1 - s->omega * u2 + s->g1 * v);
                q[1] = (double)(s->omega * u1 + s->sigma * u2);
            } else {
                y = (double)(s->b[0] * v + s->b[1] * q[0] + s->b[2] * q[1] - s->a[1] * q[2]
                             - s->a[2] * q[3]);
                q[1] = q[0], q[0] = v, q[3] = q[2], q[2] = y;
            }
            v = y;
        }
        before = h, h = v;
        size += fabs(h) * peak, step += h * code;
        if (isnan(out.worst) && size >= 1)
            out.worst = (double)(n + 1);
        if (isnan(out.code) && fabs(step) >= 1)
            out.code = (double)(n + 1);
    }
    double slope = fabs(h) - fabs(before);
    if (isnan(out.worst))
        out.worst = ceil(RUN + extrapolate(size, fabs(h) * peak, slope * peak, 1));
    if (isnan(out.code))
        out.code = ceil(RUN + extrapolate(step * (h < 0 ? -1 : 1), fabs(h) * code, slope * code,
                                          1));
    return out;
}

void pw_integrators_time(const pw_proof *proof, pw_realisation *r)
{
    for (int i = 0; i < r->count; i++) {     /* node i is the output of section i */
        if (!r->node[i].integrates)
            continue;
        reach out = find_reach(proof->paths.line, i, r->input_peak, r->input_code);
        r->node[i].samples_to_clip = out.worst;
        r->node[i].samples_to_clip_code = !proof->format.fixed ? NAN
                                        : stands_still(&proof->format, r, i, out.code) ? INFINITY
                                        : out.code;
    }
}
