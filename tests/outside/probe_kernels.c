/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Prints the kernels of a cascade given by its words, for tests that run them on a part:
 *     probe_kernels TARGET q15|q31 WRAP TRUNCATE  <  one line a section:
 *     order b0 b1 b2 a1 a2 b_fraction a_fraction cannot_clip fits_32
 * The output is C: the kernels and `void probe_block(probe_state *s, .. in, .. out, size_t n)`; the
 * program around it gives probe_state with SAMPLE d[SECTIONS][4], and probe_cascade. */
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "emit/cascade.h"

static int read_sections(pw_realisation *r)
{
    pw_words w = {.structure = PW_DIRECT_1};
    int cannot, fits;
    while (r->count < PW_MAX_SECTIONS
           && scanf("%d %d %d %d %d %d %d %d %d %d", &w.order, &w.b[0], &w.b[1], &w.b[2], &w.a[1], &w.a[2], &w.b_fraction,
                    &w.a_fraction, &cannot, &fits) == 10) {
        w.cannot_clip = cannot;
        w.fits_32 = fits;
        r->section[r->count++] = w;
    }
    return r->count;
}

int main(int argc, char **argv)
{
    static pw_realisation r;
    pw_target target;
    pw_messages messages = {.file = "probe"};
    pw_arena arena = {0};
    pw_text text = {0};
    if (argc != 5 || pw_target_read(argv[1], (pw_where){0, 0}, &target, &messages)) return 2;
    r.sample = strcmp(argv[2], "q15") ? PW_Q31 : PW_Q15;
    r.wrap = atoi(argv[3]);
    r.truncate = atoi(argv[4]);
    if (!read_sections(&r)) return 2;
    const pw_cascade cascade = {.realisation = &r, .target = &target, .array = true};
    pw_code *file = pw_code_file(&arena, "probe", r.sample == PW_Q15 ? "int16_t" : "int32_t");
    if (!pw_cascade_fits(&cascade) || pw_cascade_emit(&cascade, file)) return 3;
    pw_code_render(file, &text);
    fputs(pw_text_string(&text), stdout);
    pw_text_free(&text);
    pw_arena_free(&arena);
    pw_target_free(&target);
    return 0;
}
