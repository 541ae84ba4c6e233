/* SPDX-License-Identifier: GPL-3.0-or-later */
/* One realisation in the making. */
#ifndef PW_WORDS_JOB_H
#define PW_WORDS_JOB_H

#include "words/proof.h"

typedef struct pw_job {
    const pw_stage *stage;
    pw_format format;
    pw_band band;
    pw_messages *messages;
    pw_realisation *out;         /* ideal[] monic until the end */
    long double factor;          /* of the whole, from sample to sample */
    long double start_gain[PW_MAX_SECTIONS];  /* as scaling set them */
    long double gain[PW_MAX_SECTIONS];        /* as they are, after giving way to rounding */
    long double inner[PW_MAX_SECTIONS];      /* coupled: part of full scale that its words take */
    pw_structure structure[PW_MAX_SECTIONS];
    double share[PW_MAX_SECTIONS];           /* of the output noise, LSB^2 */
    pw_proof proof;              /* of the last solution; pw_job_free */
    int unstable;                /* section whose words are, from 1; 0: none */
} pw_job;

/* Words of every section for the structures in job->structure, scaled, proved, with their noise.
 * False where a section finds no words (job->unstable). */
bool pw_job_solve(pw_job *job);

/* The words alone, at the first scales and without proof. */
bool pw_job_words(pw_job *job);
void pw_job_free(pw_job *job);

/* Word length that keeps the deviation within limits.magnitude (0.5 dB where not given): the
 * present one where it does, else the shortest that would; 0: none up to 32 bits. */
int pw_job_enough_bits(pw_job *job);

/* Fills out->word_magnitude_db and word_phase_deg, while ideal[] is monic. */
void pw_deviation_monic(pw_job *job);
/* The largest error of the response, complex, against the largest response of the band, as dB (8.7
 * times the ratio): what a deviation deep in a stop band or a notch amounts to. Of one section:
 * what its words alone would do to the whole. */
double pw_bend(const pw_job *job);
double pw_section_bend(const pw_job *job, int k);

/* Sets job->structure as the stage asks, or chooses; solves; says why. */
PW_CHECKED pw_status pw_job_choose(pw_job *job);

/* ---- coupled.c ---- */

/* Words of the rotation form of gain times the section, whose two words stay within reach of full
 * scale: before[] are the sections it follows (words chosen), the first of them driven by peak. */
bool pw_quantise_coupled(const pw_format *format, const pw_section *section, long double gain,
                         const pw_words *before, int count, double peak, long double reach,
                         pw_words *words);
/* A complex pair of poles, not at right angles to nothing: omega is no word of 0. */
bool pw_coupled_suits(const pw_format *format, const pw_section *section);

/* ---- feedback.c ---- */

/* k1 and k2 of the quietest error feedback for these poles. hold: of those that lose nothing at
 * rest (k1 + k2 = 1), for a section that an integrator follows or that integrates. */
void pw_choose_feedback(const double a[3], bool hold, int32_t *k1, int32_t *k2);
/* Whether a section from k on integrates. */
bool pw_integrates_from(const pw_realisation *r, int k);

#endif
