/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The bound: once transients are gone, a zero-input cycle is the response to its own rounding
 * errors, so it is no larger than the sum of half steps times the L1 norms from their places to
 * the output; amplitudes are whole or half LSB, so the bound is rounded down to those. It holds as
 * long as nothing wraps: where an input within the peak can make a node wrap, what follows may
 * keep itself up at any size, so the bound is full scale; where none can, cycles that wrap are not
 * reached and not counted.
 *
 * The search: bit-true runs without input, and with small constant inputs, from states where cycles
 * are known to live: a constant and an alternating value at the edge of the dead band
 * 0.5 / |1 + a1 + a2| and 0.5 / |1 - a1 + a2|; a sine at the pole's angle of 0.5 / (1 - a2)
 * (L. B. Jackson, An analysis of limit cycles due to multiplication rounding in recursive digital
 * filters, 1969); and random states within the bound. Each run ends when a state comes back (R. P.
 * Brent, An improved Monte Carlo factorization algorithm, BIT 20, 1980, for the way to notice), or
 * at the end of its share of samples. */
#include "words/cycles.h"
#include "words/step.h"

#include <math.h>
#include <string.h>

#define STEPS 600000             /* section steps of the whole search */
#define TRIALS_RANDOM 1500         /* most; the steps end earlier where runs are long */

typedef struct hunt {
    const pw_format *format;
    pw_realisation *r;
    long left;                   /* section steps */
    uint64_t random;
    double bound[PW_MAX_SECTIONS];   /* LSB, of a cycle at each section's output */
    bool overflows;              /* an input within the peak can make a node clip or wrap */
    int64_t start[PW_MAX_SECTIONS][6];
} hunt;

static int64_t random_within(hunt *h, double size)
{
    h->random ^= h->random << 13, h->random ^= h->random >> 7, h->random ^= h->random << 17;
    double unit = (double)(h->random >> 11) * 0x1p-53;
    double limit = ldexp(1, h->format->sample_bits - 1) - 1;
    return (int64_t)rint((2 * unit - 1) * fmin(size, limit));
}

static int64_t step_all(const hunt *h, int64_t state[][6], int64_t x, uint64_t *clips)
{
    for (int k = 0; k < h->r->count; k++)
        x = pw_step_section(h->format, h->r->wrap, &h->r->section[k], state[k], x, clips);
    return x;
}

/* Runs from h->start with a constant input until a state returns; false where none does in time.
 * state is one of the cycle. */
static bool find_cycle(hunt *h, int64_t input, long most, int64_t state[][6], int *period)
{
    int64_t mark[PW_MAX_SECTIONS][6];
    size_t bytes = (size_t)h->r->count * sizeof mark[0];
    long power = 1, since = 0;
    memcpy(state, h->start, bytes);
    memcpy(mark, state, bytes);
    for (long n = 0; n < most; n++) {
        step_all(h, state, input, NULL);
        h->left -= h->r->count;
        since++;
        if (memcmp(mark, state, bytes) == 0) {
            *period = (int)since;
            return true;
        }
        if (since == power) {
            memcpy(mark, state, bytes);
            power *= 2, since = 0;
        }
    }
    return false;
}

/* What a cycle does at the output: the largest value without input, half the swing with one. */
static double amplitude(hunt *h, int64_t input, int64_t state[][6], int period, uint64_t *clips)
{
    int64_t copy[PW_MAX_SECTIONS][6], high = INT64_MIN, low = INT64_MAX;
    memcpy(copy, state, (size_t)h->r->count * sizeof copy[0]);
    for (int n = 0; n < period; n++) {
        int64_t y = step_all(h, copy, input, clips);
        high = y > high ? y : high, low = y < low ? y : low;
    }
    h->left -= (long)period * h->r->count;
    return input ? (double)(high - low) / 2 : (double)(high > -low ? high : -low);
}

static void attempt(hunt *h, int64_t input)
{
    int64_t state[PW_MAX_SECTIONS][6];
    int period;
    pw_limit_cycle *found = &h->r->limit_cycle;
    if (h->left <= 0 || !find_cycle(h, input, h->left / (6 * h->r->count) + 64, state, &period))
        return;
    uint64_t clips = 0;
    double size = amplitude(h, input, state, period, &clips);
    if (clips && !h->overflows)
        return;                  /* kept up by overflow, which no input brings about */
    if (input)
        found->found_constant_lsb = fmax(found->found_constant_lsb, size);
    if (input || !(size > found->found_lsb))
        return;
    found->found_lsb = size;
    found->found_period = period;
    found->has_state = true;
    memset(found->state, 0, sizeof found->state);
    memcpy(found->state, state, (size_t)h->r->count * sizeof state[0]);
}

static void clear(hunt *h)
{
    memset(h->start, 0, sizeof h->start);
}

static int64_t clamp(const hunt *h, double v)
{
    double limit = ldexp(1, h->format->sample_bits - 1) - 1;
    return (int64_t)fmax(-limit, fmin(limit, rint(v)));
}

/* The section's two last outputs, or its two words, as a sine of this amplitude and angle. */
static void start_sine(hunt *h, int k, double size, double angle, double phase)
{
    int64_t *s = h->start[k];
    bool coupled = h->r->section[k].structure == PW_COUPLED;
    clear(h);
    s[coupled ? 0 : 2] = clamp(h, size * cos(phase));
    s[coupled ? 1 : 3] = clamp(h, size * (coupled ? sin(phase) : cos(phase - angle)));
    if (k + 1 < h->r->count && h->r->section[k + 1].structure != PW_COUPLED)
        h->start[k + 1][0] = h->start[k + 1][1] = clamp(h, size * cos(phase));
}

static void section_attempts(hunt *h, int k)
{
    static const double part[] = {1, 0.999, 0.9, 0.6};
    const double *a = h->r->section[k].realised_a;
    double rest = 0.5 / fabs(1 + a[1] + a[2]), flip = 0.5 / fabs(1 - a[1] + a[2]);
    double turn = 0.5 / (1 - fabs(a[2])), r = sqrt(fabs(a[2]));
    double angle = r > 0 ? acos(fmax(-1, fmin(1, -a[1] / (2 * r)))) : 0;
    for (size_t i = 0; i < sizeof part / sizeof *part; i++) {
        start_sine(h, k, floor(rest * part[i]), 0, 0), attempt(h, 0);
        start_sine(h, k, -floor(rest * part[i]), 0, 0), attempt(h, 0);
        start_sine(h, k, floor(flip * part[i]), M_PI, 0), attempt(h, 0);
        if (h->r->section[k].order == 2)
            for (int phase = 0; phase < 3; phase++)
                start_sine(h, k, turn * part[i], angle, phase * 1.1), attempt(h, 0);
    }
}

static void random_attempts(hunt *h)
{
    for (int i = 0; i < TRIALS_RANDOM && h->left > 0; i++) {
        clear(h);
        for (int k = 0; k < h->r->count; k++) {
            bool coupled = h->r->section[k].structure == PW_COUPLED;
            for (int j = 0; j < (coupled ? 2 : 4); j++)
                h->start[k][j] = random_within(h, h->bound[j < 2 && !coupled && k ? k - 1 : k] + 2);
            if (k == 0 && !coupled)
                h->start[k][0] = h->start[k][1] = 0;
        }
        attempt(h, i % 8 == 7 ? 1 + i / 8 : 0);
    }
}

static long double rounding_bound(pw_proof *p, const pw_realisation *r, int k)
{
    return pw_proof_rounding(p, r, k) / p->format.lsb;
}

void pw_cycles_find(pw_proof *proof, pw_realisation *r)
{
    pw_limit_cycle *c = &r->limit_cycle;
    memset(c, 0, sizeof *c);
    if (!proof->format.fixed)
        return;
    hunt h = {.format = &proof->format, .r = r, .left = STEPS, .random = 88172645463325252u};
    c->given = true;
    for (int k = 0; k < r->count; k++)
        h.bound[k] = (double)rounding_bound(proof, r, k);
    c->bound_lsb = h.bound[r->count - 1];
    if (isinf(c->bound_lsb))
        return;
    for (int i = 0; i < r->nodes; i++)
        h.overflows = h.overflows || r->node[i].can_clip;
    double whole = ldexp(1, proof->format.sample_bits - 1);
    c->bound_lsb = r->wrap && h.overflows ? whole : fmin(floor(2 * c->bound_lsb) / 2, whole);
    for (int k = 0; k < r->count; k++)
        section_attempts(&h, k);
    random_attempts(&h);
}
