/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The response part of the results: a table, and the largest errors over the band. */
#ifndef PW_REPORT_RESPONSE_H
#define PW_REPORT_RESPONSE_H

#include "report/results.h"

/* Fills all of *out. Errors over limits.band where the analog magnitude is within limits.floor of
 * its largest in the band: transform = digital against analog, quantisation = realised against
 * digital, total = realised against analog. The realised filter works from sample to sample; it is
 * brought to output units per input unit by output_full_scale / input_full_scale. Phases are
 * wrapped to (-180, 180] degrees, errors of phase to 0..180; levels stop at +-PW_WORST_DB. The
 * table runs from half the band's lower end to twice its upper one, but below 0.495 of the rate. */
void pw_response_analyse(const pw_stage *stage, const pw_roots *analog, const pw_digital *digital,
                         const pw_realisation *realisation, pw_response *out);

/* The realised response in output units per input unit, and its group delay in seconds. */
double complex pw_realised_response(const pw_realisation *realisation, double rate_hz, double hz);
double pw_realised_group_delay(const pw_realisation *realisation, double rate_hz, double hz);

#endif
