/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the reports for people say in words: each phrase has its home here, and the text and the
 * HTML report both use it. Every function appends to out. */
#ifndef PW_REPORT_PHRASES_H
#define PW_REPORT_PHRASES_H

#include "report/results.h"

/* "all 3 limits are met", "1 of 3 limits is NOT MET", "no limit was given" */
void pw_phrase_verdict(const pw_results *results, pw_text *out);

/* The stage in a sentence. */
void pw_phrase_stage(const pw_results *results, pw_text *out);

/* "bilinear, prewarped at 400 Hz, gain matched at 1 kHz" */
void pw_phrase_transform(const pw_digital *digital, pw_text *out);
/* "prewarped at 400 Hz", "each section prewarped", "no prewarp" */
void pw_phrase_prewarp(pw_prewarp prewarp, double hz, pw_text *out);

/* How one of the tried transforms was set: "prewarped at 400 Hz", "zeros at infinity to half the
 * rate", "does not exist"; nothing where there is nothing to set. */
void pw_phrase_candidate(const pw_candidate *candidate, pw_text *out);
/* By how much the chosen transform beats the next of those tried; nothing where only one was. */
void pw_phrase_choice(const pw_digital *digital, pw_text *out);

/* "q15, 16-bit coefficients, rounds to nearest, saturates, l1 scaling" */
void pw_phrase_arithmetic(const pw_realisation *realisation, pw_text *out);

/* "0.0625 dB at 998 Hz" */
void pw_phrase_peak(const pw_error_peak *peak, const char *unit, pw_text *out);

/* What a limit is called, what was asked and what was found. */
void pw_phrase_limit(const pw_results *results, const pw_limit_row *row, pw_text *name,
                     pw_text *asked, pw_text *found);

/* Whether and where anything can clip, and from which input level; one or two sentences. */
void pw_phrase_range(const pw_results *results, pw_text *out);
/* When a node that integrates reaches its clamp: by the worst input, by one code of offset. */
void pw_phrase_integrator(const pw_results *results, const pw_node *node, pw_text *out);
/* Noise, limit cycles and cost in a line each; floats say why there is none. */
void pw_phrase_noise(const pw_results *results, pw_text *out);
void pw_phrase_limit_cycle(const pw_results *results, pw_text *out);
void pw_phrase_cost(const pw_results *results, pw_text *out);
const char *pw_cost_unit(const pw_results *results);   /* what its model counts: "instructions" or "cycles" */

/* What a reader must know before a machine relies on this; ended by a null. */
extern const char *const pw_cautions[];
extern const char pw_caution_short[];    /* the same in a line */

bool pw_is_fixed(const pw_realisation *realisation);

/* Indices of the nodes, those nearest to their clamp first; a stable order. */
void pw_nodes_by_headroom(const pw_realisation *realisation, int order[PW_MAX_NODES]);

#endif
