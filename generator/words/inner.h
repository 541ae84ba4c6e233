/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the files of this station share. */
#ifndef PW_WORDS_INNER_H
#define PW_WORDS_INNER_H

#include "words/norms.h"
#include "words/realisation.h"

/* ---- format.c: what a sample and a word can hold ---- */

typedef struct pw_format {
    pw_sample sample;
    bool fixed, truncate;
    int sample_bits;             /* 16 or 32; 0 for floats */
    int word_bits;               /* of coefficients: 16 or 32; 0 for floats */
    double lsb;                  /* of full scale: 2^-15, 2^-31; 0 for floats */
    double largest;              /* largest positive sample of full scale; 1 for floats */
} pw_format;

pw_format pw_format_of(const pw_arithmetic *arithmetic);

/* Whether no accumulator of the section can leave int64_t, whatever its state and input. */

bool pw_words_safe(const pw_format *format, const pw_words *words);
/* Whether the accumulator of a direct form always fits int32_t, whatever its state and input. */
bool pw_words_fit_32(const pw_format *format, const pw_words *words);
/* Fills realised_b and realised_a from the words. */
void pw_words_realise(const pw_format *format, pw_words *words);

/* ---- quantise.c: a section and a gain -> words ---- */

/* b = sum of value[j] * unit[j]: a numerator whose exact zeros at 1 and -1 and on the unit circle
 * survive any rounding of the values. */
typedef struct pw_basis { int count; int unit[3][3]; long double value[3]; } pw_basis;

pw_basis pw_numerator_basis(const pw_section *section, long double gain);

/* Words of a direct form for gain times the section, rounded to nearest: fractions, b, a; k1 and
 * k2 must be set. False where no fraction makes the accumulator safe. */
bool pw_quantise_direct(const pw_format *format, const pw_section *section, long double gain,
                        pw_words *words);
void pw_quantise_float(const pw_format *format, const pw_section *section, long double gain,
                       pw_words *words);
/* Poles strictly inside the unit circle, but for those of the section that stand at exactly 1. */
bool pw_words_stable(const pw_section *section, const pw_words *words);
/* Whether a pole stands at exactly 1. */
bool pw_section_has_integrator(const pw_section *section);
/* a_fraction as the poles alone allow it. */
int pw_pole_fraction(const pw_format *format, const pw_section *section);

/* ---- response.c ---- */

typedef struct pw_band {         /* frequencies of the band where words are judged */
    int count;
    double theta[160];           /* radians per sample */
    double hz[160];
    double level[160];           /* magnitude of the model here, of its largest in the band */
    bool judged[160];            /* it is above the floor here */
} pw_band;

void pw_band_make(const pw_stage *stage, const pw_roots *z, pw_band *out);
/* gain * prod(z - zero) / prod(z - pole) at z = exp(j theta), without cancellation near z = 1. */
double complex pw_ideal_response(const pw_section *section, double theta);
double complex pw_words_response(const pw_words *words, double theta);
/* ---- paths.c ---- */

void pw_line_of_words(const pw_words *words, pw_line *line);

/* ---- scale.c ---- */

/* Gains of the sections of a realisation: ideal[] monic, words not yet chosen. factor: of the
 * whole, from sample to sample. margin, below 1: what of the largest sample an output may take.
 * gain[k] multiplies section k; their product is factor. */
void pw_scale_gains(const pw_format *format, const pw_realisation *r, long double factor,
                    long double margin, long double gain[]);

#endif
