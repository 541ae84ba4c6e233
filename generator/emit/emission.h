/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the files of emit/ share: the emission under way, and the kernels that write sections.
 *
 * A form is a row of functions that write the code items of one section. For each section the first
 * form that fits is taken, in the order of forms.c. To add forms, write an array of pw_form in a
 * file of its own, end it with a row without a name, and name it in forms.c. Kernels in the
 * instructions of a part are another matter: see cascade.h. */
#ifndef PW_EMIT_EMISSION_H
#define PW_EMIT_EMISSION_H

#include "emit/cascade.h"
#include "emit/code.h"
#include "report/results.h"

typedef struct pw_emission {
    const pw_results *results;
    const pw_realisation *r;
    const pw_target *target;
    const char *stage;           /* its name */
    const char *type;            /* of a sample: "int16_t", "int32_t", "float", "double" */
    const char *family;          /* "q15", "q31", "f32", "f64" */
    int bits;                    /* of a sample: 16, 32; 0 for floats */
    bool fixed, standalone;
    bool single;                 /* float32 */
    bool integrates;             /* a section does: settle is reset */
    bool counts;                 /* a clamp is left somewhere: there is something to count */
    bool part_kernels;           /* all sections have kernels of the part, which read s->d[] */
    const struct pw_form *form[PW_MAX_SECTIONS];
    pw_arena *arena;
} pw_emission;

typedef struct pw_form {
    const char *name;            /* for the comment above a section: "direct form 1" */
    bool (*fits)(const pw_emission *e, const pw_words *w);
    /* Members of the state struct. */
    void (*fields)(const pw_emission *e, const pw_words *w, pw_code *in);
    /* Named constants, at file scope. */
    void (*constants)(const pw_emission *e, const pw_words *w, pw_code *in);
    /* Functions that it needs, at file scope; once a file, by pw_once on file. null: none. */
    void (*helpers)(const pw_emission *e, const pw_words *w, pw_code *file);
    /* The body of "static @ $_section_#($_state *s, @ x)", which returns y. null: has block. */
    void (*step)(const pw_emission *e, const pw_words *w, pw_code *body);
    /* Statements that take the section over the n samples at IN to out, in a scope that has s, in,
     * out, n; in is the text of the input pointer: "in" for the first section, "out" after it.
     * null: the block loops over step. */
    void (*block)(const pw_emission *e, const pw_words *w, const char *in, pw_code *body);
    /* The body of "static @ $_settle_#($_state *s, @ x)": the state (all zero before) as if x had
     * been there for ever; returns y. */
    void (*settle)(const pw_emission *e, const pw_words *w, pw_code *body);
    /* The member that holds word k of the simulation's state (x1 x2 y1 y2 e1 e2, or u1 u2), with #;
     * null where the section keeps no such word. */
    const char *(*member)(const pw_emission *e, const pw_words *w, int k);
} pw_form;

/* Sets everything up; forms are chosen. The arena is the caller's. */
void pw_emission_begin(pw_emission *e, const pw_results *results, pw_arena *arena);

extern const pw_form pw_forms_runtime[], pw_forms_fixed[], pw_forms_float[];

/* ---- what forms share ---- */

/* The largest magnitude that the accumulator of a direct section can reach for any samples and any
 * state, half a step included. */
double pw_direct_reach(const pw_emission *e, const pw_words *w);

/* "b0 = 0.0470924" with the ideal value where it differs. */
const char *pw_word_note(const pw_emission *e, const char *name, double realised);

/* "at most 1.07e+09 < 2^30 for any samples": the reach of an accumulator, as a note. */
const char *pw_reach_note(const pw_emission *e, double reach);

/* The proved bound of a node of this section, as a phrase for a note; "" where there is none. */
const char *pw_bound_note(const pw_emission *e, int section, const char *node);

/* ---- the parts of a file ---- */

void pw_story(const pw_emission *e, pw_code *comment);           /* what the header opens with */
void pw_emit_converters(const pw_emission *e, pw_code *header, pw_code *source);
const char *pw_build_line(const pw_emission *e);

#endif
