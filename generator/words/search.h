/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A local search for words that follow the ideal section more closely than rounded ones. */
#ifndef PW_WORDS_SEARCH_H
#define PW_WORDS_SEARCH_H

#include "words/inner.h"

/* Spacing of words: of a[1] and a[2], and of each value of the numerator's basis. */
typedef struct pw_steps { double a[3], b[3]; } pw_steps;

/* Replaces the words of a direct or transposed form by better neighbours. */
void pw_refine_words(const pw_format *format, const pw_section *section, long double gain,
                     const pw_band *band, pw_words *words);

/* a and b hold the rounded coefficients of gain times the section, and get better ones on the same
 * grid. Returns the largest deviation over the judged points: |log ratio| of the magnitude and a
 * tenth of the phase in radians. Never larger than that of the rounded ones. */
double pw_search_words(const pw_format *format, const pw_section *section, long double gain,
                       const pw_band *band, const pw_steps *steps, double a[3], double b[3]);

#endif
