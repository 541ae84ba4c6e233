/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Words near the rounded ones that follow the ideal section more closely.
 *
 * Method: for every pair of words of a within two steps of the rounded ones, b is scaled so that
 * the largest deviation over the band is the same up and down, rounded, and its neighbours are
 * tried. The rounded words are among the candidates, so the result is never worse than rounding.
 * Where the zeros are a pair on the unit circle, the two values of b are taken as the fraction
 * that is nearest to their ratio, within GAIN_GIVEN of gain: the notch then stands where it
 * should. */
#include "words/search.h"

#include <complex.h>
#include <math.h>
#include <string.h>

#define REACH 2                  /* steps of a, each way */
#define KEPT 4                   /* pairs of a whose b is searched */
#define GAIN_GIVEN 5e-5          /* of gain that a notch may cost to stand where it should: 0.0004
                                    dB */
#define POINTS ((int)(sizeof ((pw_band *)0)->hz / sizeof(double)))

typedef struct candidate {
    double a[3];
    double range;                /* half the spread of the log ratio over the band, b ideal */
    double middle;               /* its centre: b is scaled by exp(-middle) */
} candidate;

typedef struct search {
    const pw_format *format;
    const pw_section *section;
    const pw_band *band;
    pw_basis basis;              /* values include the gain */
    double b_step[3], a_step[3];
    int count;                   /* points that are judged */
    double complex t[POINTS];    /* 1 - 1/z */
    double complex log_b[POINTS], log_a[POINTS];   /* of the ideal polynomials */
    double complex now_a[POINTS];                  /* log ratio of the a at hand, ideal over
                                                      words */
} search;

static double complex polynomial(double c0, double c1, double c2, double complex t)
{
    long double sum = (long double)c0 + c1 + c2, slope = (long double)c1 + 2 * (long double)c2;
    return (double)sum - (double)slope * t + c2 * t * t;
}

static void b_of(const pw_basis *basis, const double value[3], double b[3])
{
    for (int k = 0; k < 3; k++) {
        long double sum = 0;
        for (int j = 0; j < basis->count; j++)
            sum += basis->unit[j][k] * (long double)value[j];
        b[k] = (double)sum;
    }
}

/* prod (1 - root/z) over n roots. */
static double complex root_product(const double complex *root, int n, double theta)
{
    double s = sin(theta / 2), c = cos(theta / 2);
    double complex step = CMPLX(-2 * s * s, 2 * s * c), h = 1;
    for (int k = 0; k < n; k++)
        h *= step + (1 - root[k]);
    return h / cexp(CMPLX(0, n * theta));
}

static void set_points(search *s, const pw_section *section, long double gain)
{
    for (int i = 0; i < s->band->count; i++) {
        if (!s->band->judged[i])
            continue;
        double theta = s->band->theta[i], sine = sin(theta / 2), cosine = cos(theta / 2);
        int delay = section->poles - section->zeros;
        s->t[s->count] = CMPLX(2 * sine * sine, 2 * sine * cosine);
        s->log_a[s->count] = clog(root_product(section->pole, section->poles, theta));
        s->log_b[s->count] = clog((double)gain * section->gain
                                  * root_product(section->zero, section->zeros, theta)
                                  * cexp(CMPLX(0, -delay * theta)));
        s->count++;
    }
}

static double wrap(double angle)
{
    return angle - 2 * M_PI * rint(angle / (2 * M_PI));
}

static bool stable(const pw_section *section, const double a[3])
{
    if (pw_section_has_integrator(section))
        return a[2] <= 1;
    return section->order == 1 ? fabs(a[1]) < 1 : a[2] < 1 && fabs(a[1]) < 1 + a[2];
}

static void set_a(search *s, const double a[3])
{
    for (int i = 0; i < s->count; i++)
        s->now_a[i] = s->log_a[i] - clog(polynomial(1, a[1], a[2], s->t[i]));
}

static void judge_a(search *s, candidate *c)
{
    double high = -INFINITY, low = INFINITY;
    set_a(s, c->a);
    for (int i = 0; i < s->count; i++) {
        high = fmax(high, creal(s->now_a[i]));
        low = fmin(low, creal(s->now_a[i]));
    }
    c->range = (high - low) / 2;
    c->middle = (high + low) / 2;
}

/* Largest deviation with these b and the a of now_a: magnitude first, a little of the phase. */
static double judge(const search *s, const double b[3], double best)
{
    double worst = 0;
    for (int i = 0; i < s->count && worst < best; i++) {
        double complex ratio = s->now_a[i] + clog(polynomial(b[0], b[1], b[2],
                                                             s->t[i])) - s->log_b[i];
        worst = fmax(worst, fabs(creal(ratio)) + 0.1 * fabs(wrap(cimag(ratio))));
    }
    return worst;
}

static bool holds(const pw_format *format, double step, const double v[], int n)
{
    double limit = ldexp(1, format->word_bits - 1) - 1;
    for (int k = 0; k < n && format->fixed; k++)
        if (fabs(v[k]) > limit * step)
            return false;
    return true;
}

/* The KEPT best pairs of a. */
static int gather(search *s, const double rounded[3], candidate kept[KEPT])
{
    int n = 0;
    bool fixed_sum = pw_section_has_integrator(s->section);
    int first = fixed_sum ? 0 : REACH, second = s->section->order == 2 ? REACH : 0;
    for (int i = -first; i <= first; i++)
        for (int j = -second; j <= second; j++) {
            candidate c = {.a = {1, rounded[1] + i * s->a_step[1], rounded[2] + j * s->a_step[2]}};
            if (fixed_sum)
                c.a[1] = -1 - c.a[2];
            if (!stable(s->section, c.a) || !holds(s->format, s->a_step[1], c.a + 1, 2))
                continue;
            judge_a(s, &c);
            int at = n < KEPT ? n++ : KEPT;
            for (; at > 0 && kept[at - 1].range > c.range; at--)
                if (at < KEPT)
                    kept[at] = kept[at - 1];
            if (at < KEPT)
                kept[at] = c;
        }
    return n;
}

/* A step of 0 is that of a coefficient that is exactly 0 (a zero at z = 0): it stays. */
static double round_to(double value, double step)
{
    return step > 0 ? rint(value / step) * step : value;
}

/* Values of b for a unit-circle pair whose ratio is nearly that of whole numbers: the first such
 * pair on either side of the rounded one. Near z = 1 the ratio is almost -2, and the way there is
 * long. */
static void fit_ratio(const search *s, double scale, double value[3])
{
    double step = s->b_step[0], w0 = rint((double)s->basis.value[0] * scale / step);
    long double ratio = s->basis.value[1] / s->basis.value[0];
    int reach = 1 + (int)fmin(40000, fabs(w0) * GAIN_GIVEN);
    double best = INFINITY;
    for (int d = 0; d <= 2 * reach && best > 0.01; d++) {
        int away = d % 2 ? (d + 1) / 2 : -d / 2;
        long double exact = ratio * (w0 + away), off = fabsl(exact - rintl(exact));
        if ((double)off < best) {
            best = (double)off;
            value[0] = (w0 + away) * step;
            value[1] = (double)rintl(exact) * step;
        }
    }
}

static void try_b(search *s, const candidate *c, double scale, double *best, double a[3],
                  double value[3])
{
    double start[3] = {0}, v[3], b[3];
    int n = s->basis.count, all = n == 3 ? 27 : n == 2 ? 9 : 3;
    for (int j = 0; j < n; j++)
        start[j] = round_to((double)s->basis.value[j] * scale, s->b_step[j]);
    bool circle = n == 2 && s->section->zeros == 2 && s->basis.unit[0][2] == 1 && s->format->fixed;
    for (int i = circle ? -1 : 0; i < all; i++) {
        if (i < 0)
            fit_ratio(s, scale, v);
        for (int j = 0, rest = i; i >= 0 && j < n; j++, rest /= 3)
            v[j] = start[j] + (rest % 3 - 1) * s->b_step[j];
        b_of(&s->basis, v, b);
        if (!holds(s->format, s->b_step[0], b, 3))
            continue;
        double found = judge(s, b, *best);
        if (found < *best) {
            *best = found;
            memcpy(value, v, sizeof v);
            memcpy(a, c->a, sizeof c->a);
        }
    }
}

double pw_search_words(const pw_format *format, const pw_section *section, long double gain,
                       const pw_band *band, const pw_steps *steps, double a[3], double b[3])
{
    search s = {.format = format, .section = section, .band = band};
    candidate kept[KEPT], rounded = {.a = {1, a[1], a[2]}};
    double value[3] = {0}, best;
    s.basis = pw_numerator_basis(section, gain);
    memcpy(s.a_step, steps->a, sizeof s.a_step);
    memcpy(s.b_step, steps->b, sizeof s.b_step);
    set_points(&s, section, gain);
    set_a(&s, rounded.a);
    best = judge(&s, b, INFINITY);
    bool better = false;
    int n = gather(&s, rounded.a, kept);
    for (int i = 0; i < n; i++) {
        double before = best;
        set_a(&s, kept[i].a);
        try_b(&s, &kept[i], exp(-kept[i].middle), &best, a, value);
        better = better || best < before;
    }
    if (better)
        b_of(&s.basis, value, b);
    return best;
}

static double spacing(double value)      /* of float32 at a value */
{
    int exponent;
    frexp(value, &exponent);
    return value == 0 ? 0 : ldexp(1, exponent - 24);
}

static pw_steps steps_of(const pw_format *format, const pw_section *section, long double gain,
                         const pw_words *w)
{
    pw_steps steps = {{0}, {0}};
    pw_basis basis = pw_numerator_basis(section, gain);
    double largest = 0;
    for (int k = 0; k < 3; k++)
        largest = fmax(largest, fabs(w->realised_b[k]));
    for (int k = 0; k < 3; k++) {
        steps.a[k] = format->fixed ? ldexp(1, -w->a_fraction) : spacing(w->realised_a[k]);
        bool tied = basis.count > 1 && basis.count < section->zeros + 1;
        double size = tied ? largest : fabs((double)basis.value[k]);
        steps.b[k] = format->fixed ? ldexp(1, -w->b_fraction) : spacing(size);
    }
    return steps;
}

void pw_refine_words(const pw_format *format, const pw_section *section, long double gain,
                     const pw_band *band, pw_words *words)
{
    if (format->sample == PW_FLOAT64 || section->order == 0)
        return;
    pw_words better = *words;
    double a[3], b[3];
    memcpy(a, words->realised_a, sizeof a);
    memcpy(b, words->realised_b, sizeof b);
    pw_steps steps = steps_of(format, section, gain, words);
    pw_search_words(format, section, gain, band, &steps, a, b);
    for (int k = 0; k < 3; k++) {
        better.fa[k] = a[k], better.fb[k] = b[k];
        if (format->fixed) {
            better.a[k] = k ? (int32_t)rint(ldexp(a[k], words->a_fraction)) : 0;
            better.b[k] = (int32_t)rint(ldexp(b[k], words->b_fraction));
        }
    }
    pw_words_realise(format, &better);
    if (pw_words_stable(section, &better) && (!format->fixed || pw_words_safe(format, &better)))
        *words = better;
}
