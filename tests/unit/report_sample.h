/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A pw_results filled by hand for the tests of the report writers: a 0.5 Hz high-pass and a
 * 400 Hz low-pass at 8 kHz in q15, with figures of the size that such a stage has. */
#ifndef TESTS_REPORT_SAMPLE_H
#define TESTS_REPORT_SAMPLE_H

#include <math.h>
#include <string.h>

#include "report/results.h"

#define SAMPLE_RATE 8000.0

static double complex sample_product(const pw_roots *roots, double complex x)
{
    double complex h = (double complex)roots->factor;
    for (int i = 0; i < roots->zeros; i++) h *= x - roots->zero[i];
    for (int i = 0; i < roots->poles; i++) h /= x - roots->pole[i];
    return h;
}

static double complex sample_bilinear(double complex s)
{
    return (1 + s / (2 * SAMPLE_RATE)) / (1 - s / (2 * SAMPLE_RATE));
}

static void sample_models(pw_results *r)
{
    double w = 2 * M_PI * 400, w1 = 2 * M_PI * 0.5;
    double complex pair = w * (-M_SQRT1_2 + M_SQRT1_2 * I);
    r->analog = (pw_roots){.poles = 3, .zeros = 1, .pole = {pair, conj(pair), -w1}, .zero = {0},
                           .factor = w * w};
    pw_roots *z = &r->digital.z;
    *z = (pw_roots){.poles = 3, .zeros = 3, .zero = {-1, -1, 1}};
    for (int i = 0; i < 3; i++) z->pole[i] = sample_bilinear(r->analog.pole[i]);
    z->factor = 1;
    z->factor = cabs(sample_product(&r->analog, 2 * M_PI * 50 * I))
                / cabs(sample_product(z, cexp(2 * M_PI * 50 / SAMPLE_RATE * I)));
    r->digital.method = PW_BILINEAR;
    r->digital.prewarp = PW_PREWARP_AT;
    r->digital.prewarp_hz = 400;
    r->digital.candidates = 2;
    r->digital.candidate[0] = (pw_candidate){
        .method = PW_BILINEAR, .prewarp = PW_PREWARP_AT, .prewarp_hz = 400, .possible = true,
        .magnitude_error_db = 0.0625, .phase_error_deg = 1.25};
    r->digital.candidate[1] = (pw_candidate){
        .method = PW_IMPULSE_INVARIANT, .prewarp = PW_PREWARP_NONE, .magnitude_error_db = NAN,
        .phase_error_deg = NAN};
}

static void sample_section(pw_results *r, int i, const double b[3], const double a[3], int order)
{
    pw_realisation *real = &r->realisation;
    pw_words *w = &real->section[i];
    pw_section *ideal = &real->ideal[i];
    *w = (pw_words){.structure = PW_DIRECT_1_SHAPED, .order = order, .b_fraction = 18,
                    .a_fraction = 14, .k1 = 1, .cannot_clip = i == 1};
    *ideal = (pw_section){.order = order};
    for (int k = 0; k < 3; k++) {
        ideal->b[k] = b[k];
        ideal->a[k] = a[k];
        w->b[k] = (int32_t)lrint(ldexp(b[k], 18));
        w->a[k] = (int32_t)lrint(ldexp(a[k], 14));
        w->realised_b[k] = ldexp(w->b[k], -18);
        w->realised_a[k] = ldexp(w->a[k], -14);
    }
}

static void sample_words(pw_results *r)
{
    pw_realisation *real = &r->realisation;
    const double complex *p = r->digital.z.pole;
    double g = 0.0175;
    real->sample = PW_Q15;
    real->coefficient_bits = 16;
    real->scaling = PW_SCALING_L1;
    real->count = 2;
    sample_section(r, 0, (double[]){g, 2 * g, g},
                   (double[]){1, -2 * creal(p[0]), creal(p[0] * p[1])}, 2);
    sample_section(r, 1, (double[]){0.1, -0.1, 0}, (double[]){1, -creal(p[2]), 0}, 1);
    real->input_peak = 0.5;
    real->input_full_scale = real->output_full_scale = 1.65;
    real->first_clip_input = 0.8;
    real->structure_why = "feedback of the rounding error costs one add and takes 31 dB of noise"
                          " away";
    real->order_why = "all 2 orders tried, lowest noise taken";
    real->noise = (pw_noise){.given = true, .output_rms_lsb = 0.75, .output_offset_lsb = -0.5,
                             .output_dbfs = -89.25, .snr_db = 89.25, .effective_bits = 14.5,
                             .input_quantisation_rms_lsb = 0.25};
    real->limit_cycle = (pw_limit_cycle){.given = true, .bound_lsb = 3, .found_lsb = 1,
                                         .found_period = 2};
}

static void sample_nodes(pw_results *r)
{
    pw_realisation *real = &r->realisation;
    real->nodes = 4;
    real->node[0] = (pw_node){"section 1 output", 1, 0.625, 4.082, 1.25, false, false, NAN, NAN};
    real->node[1] = (pw_node){"section 2 output", 2, 0.5, 6.02, 1.0, false, false, NAN, NAN};
    real->node[2] = (pw_node){"section 1 accumulator", 1, 1.25, -1.938, 2.5, true, false, NAN, NAN};
    real->node[3] = (pw_node){"section 2 accumulator", 2, INFINITY, -INFINITY, INFINITY, true, true,
                              812, 53000000};
    real->worst_node = 2;
}

static void sample_response(pw_results *r)
{
    pw_response *p = &r->response;
    p->band_hz[0] = 1;
    p->band_hz[1] = 1000;
    p->transform = p->quantisation = p->total =
        (pw_error_figures){{0.0625, 998.5}, {1.25, 1000}, {1.5e-6, 300}};
    p->rows = PW_RESPONSE_ROWS;
    for (int i = 0; i < p->rows; i++) {
        pw_response_row *row = &p->row[i];
        row->hz = 0.5 * pow(3600 / 0.5, i / (double)(p->rows - 1));
        double complex a = sample_product(&r->analog, 2 * M_PI * row->hz * I);
        double complex d = sample_product(&r->digital.z,
                                          cexp(2 * M_PI * row->hz / SAMPLE_RATE * I));
        row->analog_db = 20 * log10(cabs(a));
        row->digital_db = 20 * log10(cabs(d));
        row->analog_deg = carg(a) * 180 / M_PI;
        row->digital_deg = carg(d) * 180 / M_PI;
        row->analog_delay_s = 5.6e-4 / (1 + pow(row->hz / 400, 2));
        row->digital_delay_s = 5.5e-4 / (1 + pow(row->hz / 400, 2));
    }
}

/* stage must live as long as results. */
static inline void sample_results(pw_stage *stage, pw_results *r)
{
    memset(stage, 0, sizeof *stage);
    memset(r, 0, sizeof *r);
    stage->name = "keel_strain";
    stage->about = "Noise filter of a keel strain gauge, \302\261 1 mm/m";
    stage->rate_hz = SAMPLE_RATE;
    stage->input = stage->output = (pw_port){.given = true, .high = 3.3, .zero = 1.65, .bits = 12,
                                             .peak = 0.825, .full_scale = 1.65};
    stage->limits.floor_db = 60;
    stage->limits.magnitude_db = (pw_given){.value = 0.1, .given = true};
    stage->target = "cortex-m4f";
    stage->vectors.length = 2048;
    stage->vectors.seed = 1;
    strcpy(stage->sha256, "9f86d081884c7d659a2feaa0c55ad015a3bf4f1b2b0b822cd15d6c15b0f00a08");
    stage->file = "keel_strain.yaml";
    r->stage = stage;
    r->target.name = "cortex-m4f";
    r->target.about = "Cortex-M4 with single-precision floats";
    sample_models(r);
    sample_words(r);
    sample_nodes(r);
    sample_response(r);
    r->cost = (pw_cost){2, 5, 41.5, 512, 24, 48};
    r->limit[0] = (pw_limit_row){"magnitude", 0.1, 0.0625, "dB", true};
    r->limit[1] = (pw_limit_row){"overflow", 0, 1, "nodes", false};
    r->limits = 2;
    r->met = false;
}

#endif
