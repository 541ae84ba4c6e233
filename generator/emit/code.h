/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Emitted C as a small tree of items. Whoever emits says what stands in a file; the renderer alone
 * knows indentation, line lengths, comment marks and how a number is spelled in C.
 *
 * Text of an item may hold: $ for the name of the stage, @ for the C type of a sample, # for the
 * number of the section that the item belongs to and ` for one less (directives keep their #).
 * Comments are plain prose without substitution; what would end or upset a comment is made
 * harmless. */
#ifndef PW_EMIT_CODE_H
#define PW_EMIT_CODE_H

#include <stdbool.h>
#include <stdint.h>
#include "base/arena.h"
#include "base/text.h"

typedef enum pw_number_kind { PW_WORD, PW_SINGLE, PW_DOUBLE } pw_number_kind;
typedef struct pw_number { pw_number_kind kind; int64_t word; double real; } pw_number;

typedef enum pw_code_kind {
    PW_CODE_FILE,                /* children only */
    PW_CODE_PARAGRAPH,           /* a line of prose inside a comment item, wrapped */
    PW_CODE_COMMENT,             /* children are its paragraphs */
    PW_CODE_DIRECTIVE,           /* a preprocessor line */
    PW_CODE_LINE,                /* a statement or declaration, whole */
    PW_CODE_CONSTANT,            /* text = number; */
    PW_CODE_ENTRY,               /* a number of a table, with its comma */
    PW_CODE_ARRAY,               /* text = {numbers}; */
    PW_CODE_BLOCK,               /* text { children }tail */
    PW_CODE_FUNCTION,            /* the same with its braces on lines of their own */
    PW_CODE_RAW,                 /* whole lines from elsewhere, as they are */
    PW_CODE_BLANK
} pw_code_kind;

typedef struct pw_code {
    pw_code_kind kind;
    const char *text, *tail;     /* tail: after a closing brace */
    const char *note;            /* a comment at the end of the line, or above it; null: none */
    pw_number number;
    const int32_t *words;        /* an array's numbers: words or reals, borrowed */
    const double *reals;
    long count;
    const char *stage, *sample;  /* what $ and @ stand for */
    int section;                 /* what # stands for; 0: none */
    pw_arena *arena;
    struct pw_code *first, *last, *next;
} pw_code;

/* An empty file. stage, sample: see above; everything lives in the arena. */
pw_code *pw_code_file(pw_arena *arena, const char *stage, const char *sample);
void pw_code_render(const pw_code *file, pw_text *out);

/* Items at the end of in. Texts are borrowed: they must live as long as the arena. */
void pw_put(pw_code *in, const char *line);
void pw_put_with(pw_code *in, const char *line, const char *note);
void pw_directive(pw_code *in, const char *text);
void pw_raw(pw_code *in, const char *lines);
void pw_blank(pw_code *in);
void pw_constant(pw_code *in, const char *declaration, pw_number number, const char *note);
void pw_assign(pw_code *in, const char *what, pw_number number);         /* what = number; */
void pw_entry(pw_code *in, pw_number number, const char *note);
void pw_array_words(pw_code *in, const char *declaration, const int32_t *words, long count);
void pw_array_reals(pw_code *in, const char *declaration, const double *reals, long count,
                    bool single);
pw_code *pw_block(pw_code *in, const char *head, const char *tail);
pw_code *pw_function(pw_code *in, const char *head);
pw_code *pw_comment(pw_code *in);
void pw_comment_line(pw_code *in, const char *prose);   /* a comment of one paragraph */
void pw_prose(pw_code *comment, const char *format, ...) PW_PRINTF(2, 3);

/* The lines that make a header fit for C++: before its declarations (opens) and after them. */
void pw_extern_c(pw_code *file, bool opens);

/* An invisible group at the end of in whose items carry this section number. */
pw_code *pw_section_group(pw_code *in, int section);

/* True the first time that this key is asked for in this file: for helpers that are needed once. */
bool pw_once(pw_code *file, const char *key);

pw_number pw_word(int64_t value);
pw_number pw_real(double value, bool single);

/* A number as C source: INT32_C() and INT64_C() where an int may be too short, the smallest value
 * without overflow, floats exact with their suffix. Infinite and NaN do not occur. */
void pw_number_render(pw_number number, pw_text *out);

#endif
