/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The rotation form: two words that turn and shrink, [sigma -omega; omega sigma]. Its poles stand
 * on a square grid of the z plane, as dense at z = 1 as anywhere, and rounding is never amplified
 * by more than 1 / (1 - r). */
#include "words/job.h"

#include <complex.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>
#include "base/arena.h"

static int32_t word_of(long double value, int fraction)
{
    return (int32_t)llrintl(ldexpl(value, fraction));
}

bool pw_coupled_suits(const pw_format *format, const pw_section *section)
{
    return section->poles == 2 && cimag(section->pole[0]) != 0
        && word_of(fabs(cimag(section->pole[0])), format->word_bits - 1) != 0;
}

/* L1 from the segment's input to the two words when g = 1, the larger. */
static long double reach_of_words(const pw_words *before, int count, const pw_words *w)
{
    pw_line *line = pw_take((size_t)(count + 1) * sizeof *line);
    pw_norm (*norm)[PW_PLACES] = pw_take((size_t)(count + 1) * sizeof *norm);
    for (int k = 0; k < count; k++) {
        pw_line_of_words(&before[k], &line[k]);
        pw_line_own(&line[k]);
    }
    line[count] = (pw_line){.coupled = true, .g1 = 1, .c1 = 1};
    line[count].sigma = ldexpl(w->sigma, -w->a_fraction);
    line[count].omega = ldexpl(w->omega, -w->a_fraction);
    pw_line_close(&line[count]);
    pw_line_own(&line[count]);
    pw_norms_run(line, count + 1, norm);
    long double reach = fmaxl(norm[count][PW_PLACE_U1].l1, norm[count][PW_PLACE_U2].l1);
    free(line);
    free(norm);
    return reach;
}

/* c1, c2 and d of the numerator over the words of the poles. */
static bool output_words(const pw_format *format, const pw_section *section, long double gain,
                         pw_words *w)
{
    long double sigma = ldexpl(w->sigma, -w->a_fraction), omega = ldexpl(w->omega, -w->a_fraction);
    long double g = ldexpl(w->g, -w->a_fraction);
    long double b0 = gain * section->b[0], b1 = gain * section->b[1], b2 = gain * section->b[2];
    long double c1 = (b1 + 2 * sigma * b0) / g;
    long double c2 = (b2 - b0 * (sigma * sigma + omega * omega) + g * c1 * sigma) / (g * omega);
    long double size = fmaxl(fabsl(b0), fmaxl(fabsl(c1), fabsl(c2)));
    long double limit = ldexpl(1, format->word_bits - 1) - 1;
    for (w->c_fraction = 62; w->c_fraction >= 1; w->c_fraction--) {
        if (ldexpl(size, w->c_fraction) > limit)
            continue;
        w->c1 = word_of(c1, w->c_fraction);
        w->c2 = word_of(c2, w->c_fraction);
        w->d = word_of(b0, w->c_fraction);
        if (pw_words_safe(format, w))
            return true;
    }
    return false;
}

bool pw_quantise_coupled(const pw_format *format, const pw_section *section, long double gain,
                         const pw_words *before, int count, double peak, long double reach,
                         pw_words *w)
{
    w->structure = PW_COUPLED;
    w->order = 2;
    w->a_fraction = format->word_bits - 1;
    double size = fmax(fabs(creal(section->pole[0])), fabs(cimag(section->pole[0])));
    while (rint(ldexp(size, w->a_fraction)) > ldexp(1, format->word_bits - 1) - 1)
        w->a_fraction--;
    w->sigma = word_of(creal(section->pole[0]), w->a_fraction);
    w->omega = word_of(fabs(cimag(section->pole[0])), w->a_fraction);
    long double g = reach * format->largest / (peak * reach_of_words(before, count, w));
    /* More drive than this would cost the poles a bit of their words, or leave int64_t. */
    g = fminl(g, 0.58L);
    w->g = word_of(g, w->a_fraction);
    w->c_fraction = 1;
    return w->g != 0 && pw_words_safe(format, w) && output_words(format, section, gain, w)
        && (pw_words_realise(format, w), true);
}
