/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/json_value.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>

#define DIGITS 17             /* a double reads back exactly */
#define EXACT_INTEGER 9.0e15  /* below 2^53: every integer is a double */

void pw_json_put(json_t *object, const char *key, json_t *value)
{
    if (json_object_set_new(object, key, value)) {
        fprintf(stderr, "polewright: no memory for the JSON report\n");
        exit(PW_FAILED);
    }
}

json_t *pw_json_number(double value)
{
    return isfinite(value) ? json_real(value) : json_null();
}

json_t *pw_json_number_if(bool there, double value)
{
    return there ? pw_json_number(value) : json_null();
}

/* A count of samples: whole where a double can tell. */
json_t *pw_json_count(double value)
{
    if (fabs(value) < EXACT_INTEGER) return json_integer((json_int_t)ceil(value));
    return pw_json_number(value);
}

json_t *pw_json_text(const char *value)
{
    return json_string(value ? value : "");
}

json_t *pw_json_numbers(const double *value, int n)
{
    json_t *list = json_array();
    for (int i = 0; i < n; i++) json_array_append_new(list, pw_json_number(value[i]));
    return list;
}

json_t *pw_json_integers(const int32_t *value, int n)
{
    json_t *list = json_array();
    for (int i = 0; i < n; i++) json_array_append_new(list, json_integer(value[i]));
    return list;
}

static json_t *complexes(const double complex *value, int n)
{
    json_t *list = json_array();
    for (int i = 0; i < n; i++)
        json_array_append_new(list,
                              pw_json_numbers((double[]){creal(value[i]), cimag(value[i])}, 2));
    return list;
}

json_t *pw_json_roots(const pw_roots *model)
{
    json_t *o = json_object();
    pw_json_put(o, "poles", complexes(model->pole, model->poles));
    pw_json_put(o, "zeros", complexes(model->zero, model->zeros));
    pw_json_put(o, "factor", pw_json_number((double)model->factor));
    pw_json_put(o, "log10_factor", pw_json_number((double)log10l(fabsl(model->factor))));
    return o;
}

static int add_bytes(const char *bytes, size_t n, void *out)
{
    pw_text_add_bytes(out, bytes, n);
    return 0;
}

void pw_json_write(json_t *object, pw_text *out)
{
    json_dump_callback(object, add_bytes, out, JSON_INDENT(2) | JSON_REAL_PRECISION(DIGITS));
    pw_text_add(out, "\n");
    json_decref(object);
}
