/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Jansson values as the project's JSON has them. Every function returns a new reference. */
#ifndef PW_REPORT_JSON_VALUE_H
#define PW_REPORT_JSON_VALUE_H

#include <jansson.h>
#include "analog/model.h"
#include "base/text.h"

json_t *pw_json_number(double value);                    /* null where not finite */
json_t *pw_json_number_if(bool there, double value);
json_t *pw_json_count(double value);                     /* whole, rounded up; null likewise */
json_t *pw_json_text(const char *value);                 /* "" for null */
json_t *pw_json_numbers(const double *value, int n);
json_t *pw_json_integers(const int32_t *value, int n);
json_t *pw_json_roots(const pw_roots *model);            /* {poles, zeros, factor, log10_factor} */

/* Takes over the reference; exits with status 3 when memory is exhausted. */
void pw_json_put(json_t *object, const char *key, json_t *value);

/* Appends the text of object and a newline, and gives the reference up. */
void pw_json_write(json_t *object, pw_text *out);

#endif
