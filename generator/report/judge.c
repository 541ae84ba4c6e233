/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/judge.h"

#include <math.h>
#include <stdio.h>

static void add(pw_results *results, const char *name, double limit, double value, const char *unit, bool met)
{
    pw_limit_row *row = &results->limit[results->limits++];
    snprintf(row->name, sizeof row->name, "%s", name);
    snprintf(row->unit, sizeof row->unit, "%s", unit);
    row->limit = limit;
    row->value = value;
    row->met = met;
    if (!met) results->met = false;
}

/* A limit that the figure must not pass; a NAN passes nothing. */
static void at_most(pw_results *results, const char *name, const pw_given *limit, double value, const char *unit)
{
    if (limit->given) add(results, name, limit->value, value, unit, value <= limit->value);
}

static int clipping_nodes(const pw_realisation *realisation)
{
    int n = 0;
    for (int i = 0; i < realisation->nodes; i++) n += realisation->node[i].can_clip;
    return n;
}

/* dB. Rounding is taken for white noise, which quiet and slow inputs do not make of it: where the
 * search found a cycle that is louder than that noise, the cycle's rms counts. Floats have no
 * round-off figure of the fixed-point kind: nothing to judge. */
static double round_off_below_full_scale(const pw_realisation *r)
{
    if (!r->noise.given) return INFINITY;
    double lsb = r->sample == PW_Q15 ? 0x1p-15 : 0x1p-31;
    double cycle = r->limit_cycle.given && r->limit_cycle.found_lsb > 0
                 ? 20 * log10(r->limit_cycle.found_lsb * lsb) : -INFINITY;   /* a sine of that peak */
    return -fmax(r->noise.output_dbfs, cycle);
}

void pw_judge(pw_results *results)
{
    const pw_limits *limits = &results->stage->limits;
    const pw_error_figures *error = &results->response.total;
    results->limits = 0;
    results->met = true;
    at_most(results, "magnitude", &limits->magnitude_db, error->magnitude_db.max, "dB");
    at_most(results, "phase", &limits->phase_deg, error->phase_deg.max, "deg");
    at_most(results, "delay", &limits->delay_s, error->delay_s.max, "s");
    if (limits->noise_db.given) {
        double below = round_off_below_full_scale(&results->realisation);
        bool met = !results->realisation.noise.grows && below >= fabs(limits->noise_db.value);
        add(results, "noise", fabs(limits->noise_db.value), below, "dB below FS", met);
    }
    if (limits->overflow_forbidden) {
        int n = clipping_nodes(&results->realisation);
        add(results, "overflow", 0, n, "nodes", n == 0);
    }
    at_most(results, "cycles", &limits->cycles, results->cost.cycles_per_sample, "cycles");
    long flash = results->cost.flash_bytes;
    at_most(results, "flash", &limits->flash_bytes, flash < 0 ? (double)NAN : (double)flash, "bytes");
    at_most(results, "ram", &limits->ram_bytes, (double)results->cost.ram_bytes, "bytes");
}
