/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Which kernel of runtime/kernels/ takes a section on a part, and its text.
 *
 * A kernel is a C function of one section over n samples, as those of runtime/ are:
 *     static uint32_t NAME(T *d, const int32_t *c, const T *in, T *out, size_t n);
 * d: the state of the section, x1 x2 y1 y2; c: its words, in the kernel's own order; n: a multiple
 * of `multiple`, in may be out. It returns how often the section clipped. */
#ifndef PW_EMIT_KERNEL_H
#define PW_EMIT_KERNEL_H

#include "emit/template.h"
#include "words/realisation.h"

#define PW_KERNEL_WORDS 12

typedef struct pw_kernel {
    const char *file, *kernel;       /* in runtime/kernels/ */
    const char *why;                 /* half a sentence for the comment in the C */
    pw_template_values values;
    int multiple;                    /* samples a turn */
    int32_t word[PW_KERNEL_WORDS];   /* the table c */
    int words;
    bool needs_form;                 /* the C form is called where something clips */
    bool narrow;                     /* 32-bit accumulator */
    bool clamps;                     /* the proof does not spare them */
} pw_kernel;

/* False where the section has no kernel (its structure, or a word that cannot be negated). */
bool pw_kernel_choose(const pw_realisation *realisation, int section, const pw_target *target, pw_arena *arena,
                      pw_kernel *out);

/* The C form of the same section: always plain C. */
bool pw_kernel_form(const pw_realisation *realisation, int section, pw_arena *arena, pw_kernel *out);

/* $_step of a cascade all of whose sections have this family's kernels, as one function with its
 * words in it; state is s->d. clipped: offset of the counter in the state. False where the part or a
 * section has none. */
PW_CHECKED pw_status pw_kernel_step(const pw_realisation *realisation, const pw_target *target, const char *name,
                                    pw_text *out, bool *done);

/* The same for floats in transposed direct form II on an Arm core with a floating-point unit; ends with
 * "#else", after which the plain step and "#endif" must follow. State: s1 (and s2) of each section. */
PW_CHECKED pw_status pw_kernel_step_float(const pw_realisation *realisation, const pw_target *target, const char *name,
                                          pw_text *out, bool *done);

/* Whether both are the same text but for its name. */
bool pw_kernel_same(const pw_kernel *a, const pw_kernel *b);

/* The text of the function, named so; form: the name of its C form, where it needs one. */
PW_CHECKED pw_status pw_kernel_text(const pw_kernel *kernel, const char *name, const char *form, pw_text *out);

#endif
