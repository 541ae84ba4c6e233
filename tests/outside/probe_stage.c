/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Reads a stage file (- standard input) with the overrides that follow and exits 0 or 2 with the
 * messages on stderr; on success prints "field value" lines. */
#include <stdio.h>

#include "base/files.h"
#include "stagefile/read.h"

static void print_spec(const pw_analog_spec *a, int depth)
{
    printf("analog[%d].kind %d\n", depth, a->kind);
    for (int i = 0; i < a->zeros; i++)
        printf("zero %.17g %.17g %d %.17g\n", creal(a->zero[i].s), cimag(a->zero[i].s),
               a->zero[i].double_real, a->zero[i].s2);
    for (int i = 0; i < a->poles; i++)
        printf("pole %.17g %.17g %d %.17g\n", creal(a->pole[i].s), cimag(a->pole[i].s),
               a->pole[i].double_real, a->pole[i].s2);
    printf("gain %d %.17g %.17g %.17g %d\n", a->gain.kind, a->gain.factor, a->gain.at_hz,
           a->gain.is, a->gain.invert);
    for (int i = 0; i < a->circuit.parts; i++)
        printf("part %s %d %.17g %.17g\n", a->circuit.part[i].name, a->circuit.part[i].kind,
               a->circuit.part[i].value, a->circuit.part[i].tolerance);
    for (int i = 0; i < a->cell.values; i++)
        printf("value %s %.17g\n", a->cell.value[i].name, a->cell.value[i].value);
    for (int i = 0; i < a->members; i++) print_spec(&a->member[i], depth + 1);
}

static void print_stage(const pw_stage *s)
{
    printf("name %s\nabout %s\nrate %.17g\n", s->name, s->about, s->rate_hz);
    print_spec(&s->analog, 0);
    printf("method %s\nprewarp %d %.17g\n", pw_method_word(s->transform.method),
           s->transform.prewarp, s->transform.prewarp_hz);
    printf("sample %s\nbits %d\n", pw_sample_word(s->arithmetic.sample),
           s->arithmetic.coefficient_bits);
    printf("input %.17g %.17g %.17g %d %.17g %.17g\n", s->input.low, s->input.high, s->input.zero,
           s->input.bits, s->input.peak, s->input.full_scale);
    printf("band %.17g %.17g\nfloor %.17g\n", s->limits.band_hz[0], s->limits.band_hz[1],
           s->limits.floor_db);
    printf("vectors %d %llu\nspread %d %llu\n", s->vectors.length,
           (unsigned long long)s->vectors.seed, s->spread.draws,
           (unsigned long long)s->spread.seed);
    for (const char *const *line = s->taken; *line; line++) printf("taken %s\n", *line);
    printf("target %s %d\nsha256 %s\n", s->target, s->target_given, s->sha256);
}

int main(int argc, char **argv)
{
    pw_text yaml = {0};
    pw_stage stage = {0};
    if (argc < 2) return 3;
    pw_messages messages = {.file = argv[1][0] == '-' && !argv[1][1] ? "stdin" : argv[1]};
    pw_status status = pw_file_read(argv[1], 4 << 20, &yaml);
    if (!status)
        status = pw_stage_read(&yaml, (const char *const *)argv + 2, argc - 2, &stage, &messages);
    pw_messages_print(&messages, stderr, false);
    if (!status) print_stage(&stage);
    pw_messages_free(&messages);
    pw_stage_free(&stage);
    pw_text_free(&yaml);
    return status;
}
