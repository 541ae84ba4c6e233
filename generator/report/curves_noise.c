/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/curves.h"

#include <math.h>
#include "report/phrases.h"

#define UNIT_STEP (1.0 / 12)  /* variance of rounding to a step of 1 */
#define POINTS 320

static double power(double complex h)
{
    return creal(h) * creal(h) + cimag(h) * cimag(h);
}

/* What the rounding inside one section puts out at its output, LSB^2, white ones shaped. */
static double section_power(const pw_words *w, double complex z)
{
    if (w->structure == PW_COUPLED) {
        double sigma = ldexp(w->sigma, -w->a_fraction), omega = ldexp(w->omega, -w->a_fraction);
        double c1 = ldexp(w->c1, -w->c_fraction), c2 = ldexp(w->c2, -w->c_fraction);
        double complex away = z - sigma, below = away * away + omega * omega;
        return UNIT_STEP * (1 + power((c1 * away + c2 * omega) / below)
                            + power((c2 * away - c1 * omega) / below));
    }
    double complex one = 1, d = 1 / z;
    double complex below = 1 + (w->realised_a[1] + w->realised_a[2] * d) * d;
    double complex shape = w->structure == PW_DIRECT_1_SHAPED ? one - (w->k1 + w->k2 * d) * d : one;
    double shifted = 0;           /* rounding of the shift right that brings b to a's weight */
    if (w->b_fraction > w->a_fraction) {
        double step = ldexp(1, -w->a_fraction), part = ldexp(1, -w->b_fraction);
        shifted = UNIT_STEP * (step * step - part * part);
    }
    return (UNIT_STEP * power(shape) + shifted) / power(below);
}

double pw_noise_density(const pw_realisation *r, double rate_hz, double hz)
{
    double complex z = cexp(2 * M_PI * hz / rate_hz * I);
    double sum = 0;
    for (int i = 0; i < r->count; i++) {
        const pw_words *w = &r->section[i];
        if (i) sum *= power(pw_section_at(w->realised_b, w->realised_a, z));
        sum += section_power(w, z);
    }
    return sum * 2 / rate_hz;
}

void pw_curve_noise(const pw_results *results, pw_noise_curve *out)
{
    const pw_realisation *r = &results->realisation;
    double rate = results->stage->rate_hz, low = results->response.band_hz[0], high = rate / 2;
    out->points = 0;
    if (!pw_is_fixed(r) || low <= 0 || low >= high) return;
    out->points = POINTS;
    for (int i = 0; i < out->points; i++) {
        double hz = low * pow(high / low, i / (double)(POINTS - 1));
        double complex z = cexp(2 * M_PI * hz / rate * I), h = 1;
        for (int k = 0; k < r->count; k++)
            h *= pw_section_at(r->section[k].realised_b, r->section[k].realised_a, z);
        out->hz[i] = hz;
        out->round_off[i] = pw_noise_density(r, rate, hz);
        out->input[i] = UNIT_STEP * power(h) * 2 / rate;
    }
}
