/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Exposes the analog station to the Python tests. Each line of standard input is a JSON object;
 * each gives a line of JSON: {"poles", "zeros", "factor", "response", "delay", "log"} or {"errors"}.
 *   {"family": [approximation, shape, order, f0, f1, ripple, stopband, corner-at, normalise]}
 *                                       (words of the enumerations by number, null: not given)
 *   {"numerator": [..], "denominator": [..]}
 *   {"zeros": [[re, im]..], "poles": [..], "factor": K} or with "gain": [hz, is]
 *   {"cascade": [description..]}        and in any of them "hz": [frequencies to evaluate at] */
#include "analog/model.h"
#include "base/text.h"

#include <jansson.h>
#include <math.h>
#include <stdlib.h>

static pw_given given(const json_t *value)
{
    return (pw_given){.given = json_is_number(value), .value = json_number_value(value), .at = {7, 1}};
}

static double number(const json_t *list, int i)
{
    return json_number_value(json_array_get(list, (size_t)i));
}

static void read_family(const json_t *list, pw_family *f)
{
    *f = (pw_family){
        .approximation = (pw_approximation)number(list, 0), .shape = (pw_shape)number(list, 1),
        .order = (int)number(list, 2), .corner_hz = {number(list, 3), number(list, 4)},
        .ripple_db = given(json_array_get(list, 5)), .stopband_db = given(json_array_get(list, 6)),
        .corner_at_db = given(json_array_get(list, 7)),
        .normalise = (pw_normalise)number(list, 8), .at = {1, 1},
    };
}

static double *read_numbers(const json_t *list, int *count, pw_arena *arena)
{
    *count = (int)json_array_size(list);
    double *out = pw_arena_take(arena, sizeof *out * (size_t)(*count + 1));
    for (int i = 0; i < *count; i++)
        out[i] = number(list, i);
    return out;
}

static pw_root *read_roots(const json_t *list, int *count, pw_arena *arena)
{
    *count = (int)json_array_size(list);
    pw_root *out = pw_arena_take(arena, sizeof *out * (size_t)(*count + 1));
    for (int i = 0; i < *count; i++) {
        const json_t *pair = json_array_get(list, (size_t)i);
        out[i].s = CMPLX(number(pair, 0), number(pair, 1));
        out[i].at = (pw_where){i + 1, 1};
    }
    return out;
}

static void read_gain(const json_t *line, pw_gain *gain)
{
    const json_t *at = json_object_get(line, "gain");
    gain->kind = at ? PW_GAIN_AT : PW_GAIN_FACTOR;
    gain->factor = json_number_value(json_object_get(line, "factor"));
    gain->at_hz = number(at, 0);
    gain->is = number(at, 1);
}

static void read_spec(const json_t *line, pw_analog_spec *spec, pw_arena *arena)
{
    const json_t *members = json_object_get(line, "cascade");
    if (json_object_get(line, "family")) {
        spec->kind = PW_ANALOG_FAMILY;
        read_family(json_object_get(line, "family"), &spec->family);
    } else if (json_object_get(line, "numerator")) {
        spec->kind = PW_ANALOG_POLYNOMIALS;
        spec->numerator = read_numbers(json_object_get(line, "numerator"), &spec->numerators, arena);
        spec->denominator = read_numbers(json_object_get(line, "denominator"), &spec->denominators, arena);
    } else if (members) {
        spec->kind = PW_ANALOG_CASCADE;
        spec->members = (int)json_array_size(members);
        spec->member = pw_arena_take(arena, sizeof *spec * (size_t)(spec->members + 1));
        for (int i = 0; i < spec->members; i++)
            read_spec(json_array_get(members, (size_t)i), &spec->member[i], arena);
    } else {
        spec->kind = PW_ANALOG_ROOTS;
        spec->zero = read_roots(json_object_get(line, "zeros"), &spec->zeros, arena);
        spec->pole = read_roots(json_object_get(line, "poles"), &spec->poles, arena);
        read_gain(line, &spec->gain);
    }
}

static void print_roots(const char *name, const double complex *root, int count)
{
    printf("\"%s\": [", name);
    for (int i = 0; i < count; i++)
        printf("%s[%.17g, %.17g]", i ? ", " : "", creal(root[i]), cimag(root[i]));
    printf("], ");
}

static void print_response(const pw_roots *roots, const json_t *hz)
{
    printf("\"response\": [");
    for (int i = 0; i < (int)json_array_size(hz); i++) {
        double complex h = pw_analog_at(roots, number(hz, i));
        printf("%s[%.17g, %.17g]", i ? ", " : "", creal(h), cimag(h));
    }
    printf("], \"log\": [");
    for (int i = 0; i < (int)json_array_size(hz); i++) {
        double log_magnitude, phase;
        pw_roots_log_at(roots, CMPLX(0, 2 * M_PI * number(hz, i)), &log_magnitude, &phase);
        printf("%s[%.17g, %.17g]", i ? ", " : "", log_magnitude, phase);
    }
    printf("], \"delay\": [");
    for (int i = 0; i < (int)json_array_size(hz); i++)
        printf("%s%.17g", i ? ", " : "", pw_analog_group_delay(roots, number(hz, i)));
    printf("], ");
}

static void answer(const json_t *line)
{
    pw_arena arena = {0};
    pw_messages messages = {.file = "line"};
    pw_analog_spec spec = {.at = {1, 1}};
    pw_roots roots;
    read_spec(line, &spec, &arena);
    if (pw_analog_build(&spec, &roots, &messages) == PW_OK) {
        printf("{");
        print_roots("poles", roots.pole, roots.poles);
        print_roots("zeros", roots.zero, roots.zeros);
        print_response(&roots, json_object_get(line, "hz"));
        printf("\"factor\": \"%.21Lg\"}\n", roots.factor);
    } else {
        printf("{\"errors\": %d}\n", messages.errors);
        pw_messages_print(&messages, stderr, false);
    }
    pw_messages_free(&messages);
    pw_arena_free(&arena);
}

int main(void)
{
    char *text = NULL;
    size_t room = 0;
    while (getline(&text, &room, stdin) > 0) {
        json_t *line = json_loads(text, 0, NULL);
        if (!line)
            return 2;
        answer(line);
        json_decref(line);
    }
    free(text);
    return 0;
}
