/* SPDX-License-Identifier: GPL-3.0-or-later */
/* One struct of everything that was found out about a stage. The text, JSON and HTML reports are
 * writers over it and compute nothing. */
#ifndef PW_REPORT_RESULTS_H
#define PW_REPORT_RESULTS_H

#include "words/realisation.h"

typedef struct pw_response_row {
    double hz, analog_db, analog_deg, digital_db, digital_deg;   /* realised, in the user's units */
    double analog_delay_s, digital_delay_s;
} pw_response_row;

#define PW_RESPONSE_SPACED 241                         /* rows that are log-spaced */
#define PW_RESPONSE_ROWS 600

typedef struct pw_response {
    double band_hz[2];
    pw_error_figures transform, quantisation, total;   /* over the band, above the floor */
    pw_response_row row[PW_RESPONSE_ROWS];             /* over the band and a little beyond, by frequency: log-spaced,
                                                          beside narrow roots, and where errors are largest */
    int rows;
} pw_response;

typedef struct pw_cost {
    int sections, multiplies_per_sample;
    double cycles_per_sample;    /* NAN where the target has no model */
    long flash_bytes;            /* code and constants; -1 where the target has no model */
    long ram_bytes, stack_bytes; /* the state of one channel; 0 of stack where there is no model */
} pw_cost;

typedef struct pw_limit_row {
    char name[24];
    double limit, value;
    char unit[12];
    bool met;
} pw_limit_row;

#define PW_MAX_LIMITS 12

typedef struct pw_results {
    const pw_stage *stage;
    pw_target target;
    pw_roots analog;
    pw_digital digital;
    pw_realisation realisation;
    pw_response response;
    pw_cost cost;
    struct pw_spread *spread;    /* tolerances of a circuit; null where there are none */
    pw_limit_row limit[PW_MAX_LIMITS];
    int limits;
    bool met;
} pw_results;

#endif
