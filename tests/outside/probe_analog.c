/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Exposes the analog station to the Python tests. Each line of standard input is a JSON object
 * {"analog": a description as in a stage file, "hz": [frequencies to evaluate at]}; each gives a
 * line of JSON: {"poles", "zeros", "factor", "response", "log", "delay"}, or {"errors": how many}
 * with the messages on standard error. */
#include "analog/model.h"
#include "base/text.h"
#include "stagefile/read.h"

#include <jansson.h>
#include <math.h>
#include <stdlib.h>

static double number(const json_t *list, int i)
{
    return json_number_value(json_array_get(list, (size_t)i));
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
        if (isinf(log_magnitude))        /* as Python's JSON reads it */
            printf("%s[%sInfinity, %.17g]", i ? ", " : "", log_magnitude < 0 ? "-" : "", phase);
        else
            printf("%s[%.17g, %.17g]", i ? ", " : "", log_magnitude, phase);
    }
    printf("], \"delay\": [");
    for (int i = 0; i < (int)json_array_size(hz); i++)
        printf("%s%.17g", i ? ", " : "", pw_analog_group_delay(roots, number(hz, i)));
    printf("], ");
}

static void print_model(const pw_roots *roots, const json_t *hz)
{
    printf("{");
    print_roots("poles", roots->pole, roots->poles);
    print_roots("zeros", roots->zero, roots->zeros);
    print_response(roots, hz);
    printf("\"factor\": \"%.21Lg\"}\n", roots->factor);
}

static void answer(json_t *line)
{
    pw_messages messages = {.file = "line"};
    pw_stage stage;
    pw_roots roots;
    pw_text yaml = {0};
    json_t *whole = json_pack("{s:s, s:s, s:O}", "stage", "probe", "rate", "1 GHz", "analog",
                              json_object_get(line, "analog"));
    char *text = json_dumps(whole, JSON_REAL_PRECISION(17));
    pw_text_add(&yaml, text);
    if (pw_stage_read(&yaml, NULL, 0, &stage, &messages) == PW_OK
        && pw_analog_build(&stage.analog, &roots, &messages) == PW_OK)
        print_model(&roots, json_object_get(line, "hz"));
    else
        printf("{\"errors\": %d}\n", messages.errors);
    pw_messages_print(&messages, stderr, true);
    pw_messages_free(&messages);
    pw_stage_free(&stage);
    pw_text_free(&yaml);
    free(text);
    json_decref(whole);
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
