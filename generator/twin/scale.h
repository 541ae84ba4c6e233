/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Values of a record to samples of the filter and back. */
#ifndef PW_TWIN_SCALE_H
#define PW_TWIN_SCALE_H

#include "words/realisation.h"

typedef enum pw_values {
    PW_VALUES_VOLTS,             /* of a CSV record, about the port's zero */
    PW_VALUES_SAMPLES,           /* the numbers that the C sees: words, or floats */
    PW_VALUES_FULL_SCALE         /* of a WAV file: 1.0 is full scale */
} pw_values;

typedef struct pw_scale {
    bool fixed, single;
    double zero, unit; /* value = zero + unit * sample; sample in words, or of full scale */
    double low, high;            /* the word's ends; infinite for floats */
} pw_scale;

pw_scale pw_scale_of(pw_sample sample, const pw_port *port, pw_values values);

/* The sample for a value: for fixed point the nearest word (a tie away from 0), clamped, *outside
 * counted up where it was beyond an end; floats are rounded to float32 where that is the format. */
double pw_scale_sample(const pw_scale *scale, double value, uint64_t *outside);
double pw_scale_value(const pw_scale *scale, double sample);

#endif
