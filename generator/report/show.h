/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What `show` prints: the analog model before anything is made digital. */
#ifndef PW_REPORT_SHOW_H
#define PW_REPORT_SHOW_H

#include "analog/model.h"
#include "base/text.h"

/* Adds poles, zeros, natural frequency and Q, time constants, gain and a small table of the
 * response to out; with plot, a small plot of the magnitude in braille dots. A screen at most. */
void pw_show_text(const pw_stage *stage, const pw_roots *analog, bool plot, bool color,
                  pw_text *out);

/* The same for programs: format, stage, about, rate_hz, version, stage_file_sha256, analog as in
 * report.json, and table: [{hz, analog_db, analog_deg, analog_delay_s}..] over the same span. */
void pw_show_json(const pw_stage *stage, const pw_roots *analog, pw_text *out);

/* ---- the parts of it ---- */

/* The span of frequencies worth looking at: a decade below the slowest natural frequency to a
 * decade above the fastest, at least three decades; about rate/10 where there is none. */
void pw_show_span(const pw_stage *stage, const pw_roots *analog, double span_hz[2]);

/* The analog response at a frequency: level in dB (-INFINITY at a zero), continuous phase. */
typedef struct pw_show_point { double db, deg; } pw_show_point;
pw_show_point pw_show_at(const pw_roots *analog, double hz);

/* Frequencies of a short table over the span, rising: 1-2-5 steps, or decades where those are more
 * than room. Returns how many. */
int pw_show_frequencies(const double span_hz[2], double *hz, int room);

/* A plot of level in dB over log frequency: columns x rows of characters of 2 x 4 dots each. */
void pw_show_plot(const pw_roots *analog, const double span_hz[2], pw_text *out);

#endif
