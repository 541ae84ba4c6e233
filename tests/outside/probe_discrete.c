/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Discretises the stages that come on standard input, for test_discrete*.py.
 *   stage METHOD PREWARP HZ INFINITY MATCH RATE LOW HIGH FLOOR FACTOR POLES ZEROS re im ..
 *       PREWARP: default none at each-section; INFINITY: 0 1 2 (nyquist keep-one keep);
 *       MATCH: Hz, or -1; prints one JSON line
 *   at HZ            digital response, its delay, the sections' product and its delay
 *   error LOW HIGH   error figures of the digital model against the analog one
 * Long doubles are printed as decimal text. */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "discrete/digital.h"
#include "discrete/errors.h"

static pw_roots analog;
static pw_digital digital;
static pw_stage stage;
static pw_sections sections;
static const char *const prewarps[] = {"default", "none", "at", "each-section"};

static int word_of(const char *word, const char *const *list, int n)
{
    for (int i = 0; i < n; i++)
        if (!strcmp(word, list[i])) return i;
    fprintf(stderr, "probe: no such word: %s\n", word);
    exit(2);
}

static double number(void)
{
    double value;
    if (scanf("%lf", &value) != 1) exit(2);
    return value;
}

static void read_roots(double complex *root, int n)
{
    for (int i = 0; i < n; i++) {
        double re = number(), im = number();
        root[i] = __builtin_complex(re, im);
    }
}

static void set_places(void)
{
    stage.analog.kind = PW_ANALOG_POLYNOMIALS;
    stage.analog.at = (pw_where){1, 1};
    stage.rate_at = (pw_where){2, 1};
    stage.transform.method_at = (pw_where){3, 1};
    stage.transform.prewarp_at = (pw_where){4, 1};
    stage.transform.match_gain_hz.at = (pw_where){5, 1};
    stage.limits.band_at[0] = (pw_where){6, 1};
    stage.limits.band_at[1] = (pw_where){6, 9};
}

static void read_stage(void)
{
    static const char *const methods[] = {"bilinear", "matched-z", "impulse-invariant",
                                          "step-invariant", "best"};
    char method[32], prewarp[32];
    memset(&stage, 0, sizeof stage);
    memset(&analog, 0, sizeof analog);
    set_places();
    if (scanf("%31s %31s", method, prewarp) != 2) exit(2);
    stage.transform.method = (pw_method)word_of(method, methods, 5);
    stage.transform.prewarp = (pw_prewarp)word_of(prewarp, prewarps, 4);
    stage.transform.prewarp_hz = number();
    stage.transform.zeros_at_infinity = (pw_infinity)number();
    stage.transform.match_gain_hz.value = number();
    stage.transform.match_gain_hz.given = stage.transform.match_gain_hz.value >= 0;
    stage.rate_hz = number();
    stage.limits.band_hz[0] = number();
    stage.limits.band_hz[1] = number();
    stage.limits.floor_db = number();
    if (scanf("%Lf", &analog.factor) != 1) exit(2);
    analog.poles = (int)number();
    analog.zeros = (int)number();
    read_roots(analog.pole, analog.poles);
    read_roots(analog.zero, analog.zeros);
}

static void print_list(const char *name, const double complex *root, int n)
{
    printf("\"%s\": [", name);
    for (int i = 0; i < n; i++)
        printf("%s[%.17g, %.17g]", i ? ", " : "", creal(root[i]), cimag(root[i]));
    printf("], ");
}

static void print_sections(const char *name, bool as_listed)
{
    pw_sections_make(&digital.z, as_listed, &sections);
    printf("\"%s\": [", name);
    for (int k = 0; k < sections.count; k++) {
        const pw_section *s = &sections.list[k];
        printf("%s{\"order\": %d, ", k ? ", " : "", s->order);
        print_list("poles", s->pole, s->poles);
        print_list("zeros", s->zero, s->zeros);
        printf("\"gain\": %.17g, \"b\": [%.17g, %.17g, %.17g], \"a\": [%.17g, %.17g, %.17g]}",
               s->gain, s->b[0], s->b[1], s->b[2], s->a[0], s->a[1], s->a[2]);
    }
    printf("], ");
}

static void print_candidates(void)
{
    printf("\"candidates\": [");
    for (int i = 0; i < digital.candidates; i++) {
        const pw_candidate *c = &digital.candidate[i];
        printf("%s{\"method\": \"%s\", \"prewarp\": \"%s\", \"prewarp_hz\": %.17g, "
               "\"infinity\": %d, \"possible\": %s, \"db\": %.17g, \"deg\": %.17g}", i ? ", " : "",
               pw_method_word(c->method), prewarps[c->prewarp], c->prewarp_hz,
               (int)c->zeros_at_infinity, c->possible ? "true" : "false", c->magnitude_error_db,
               c->phase_error_deg);
    }
    printf("], ");
}

static void print_digital(void)
{
    print_list("poles", digital.z.pole, digital.z.poles);
    print_list("zeros", digital.z.zero, digital.z.zeros);
    printf("\"factor\": \"%.21Lg\", \"method\": \"%s\", \"prewarp\": \"%s\", "
           "\"prewarp_hz\": %.17g, \"matched\": %s, \"match_hz\": %.17g, ", digital.z.factor,
           pw_method_word(digital.method), prewarps[digital.prewarp], digital.prewarp_hz,
           digital.gain_matched ? "true" : "false",
           digital.match_gain_hz);
    print_sections("listed", true);
    print_sections("sections", false);
    print_candidates();
}

/* As a JSON string. */
static void print_messages(pw_messages *messages)
{
    char *text = NULL;
    size_t size = 0;
    FILE *memory = open_memstream(&text, &size);
    pw_messages_print(messages, memory, false);
    fclose(memory);
    printf("\"messages\": \"");
    for (const char *p = text; *p; p++) {
        if (*p == '\n') printf("\\n");
        else if (*p == '"' || *p == '\\') printf("\\%c", *p);
        else putchar(*p);
    }
    printf("\"}\n");
    free(text);
}

static void run_stage(void)
{
    pw_messages messages = {.file = "probe"};
    read_stage();
    pw_status status = pw_discretise(&stage, &analog, &digital, &messages);
    printf("{\"status\": %d, ", (int)status);
    if (status == PW_OK) print_digital();
    print_messages(&messages);
    pw_messages_free(&messages);
}

static void run_at(double hz)
{
    double turn = 2 * M_PI * hz / stage.rate_hz, delay = 0;
    double complex z = __builtin_complex(cos(turn), sin(turn)), product = 1;
    double complex value = pw_digital_at(&digital.z, stage.rate_hz, hz);
    for (int k = 0; k < sections.count; k++) {
        product *= pw_section_at(sections.list[k].b, sections.list[k].a, z);
        delay += pw_section_group_delay(sections.list[k].b, sections.list[k].a, z);
    }
    printf("[%.17g, %.17g, %.17g, %.17g, %.17g, %.17g]\n", creal(value), cimag(value),
           pw_digital_group_delay(&digital.z, stage.rate_hz, hz), creal(product), cimag(product),
           delay / stage.rate_hz);
}

static void run_error(double low, double high)
{
    pw_error_figures e;
    double band[2] = {low, high};
    pw_compare_digital(&analog, &digital.z, stage.rate_hz, band, stage.limits.floor_db, &e);
    printf("[%.17g, %.17g, %.17g, %.17g]\n", e.magnitude_db.max, e.magnitude_db.at_hz,
           e.phase_deg.max, e.phase_deg.at_hz);
}

int main(void)
{
    char word[16];
    while (scanf("%15s", word) == 1) {
        if (!strcmp(word, "stage")) run_stage();
        else if (!strcmp(word, "at")) run_at(number());
        else if (!strcmp(word, "error")) {
            double low = number();
            run_error(low, number());
        } else return 2;
        fflush(stdout);
    }
    return 0;
}
