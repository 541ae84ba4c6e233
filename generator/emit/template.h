/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Kernels that are written once, by hand, for one family of parts, stand in runtime/kernels/ as
 * text with a few holes. This fills the holes.
 *
 *   # ..                      a comment for the reader of the kernel file, dropped (#if .. stays)
 *   @kernel NAME              the lines up to the next @kernel
 *   @if NAME / @else / @end   kept where the value NAME is not 0 (@if !NAME: where it is); NAME may be a number
 *   @body NAME p q .. / @end  lines for later use
 *   @use NAME v w ..          those lines with p, q, .. standing for v, w, ..
 *   @repeat NAME / @end       as often as the value NAME says
 *   @asm / @end               lines of assembler: quoted, their "// .." turned into C comments
 *   $name or ${name}          the value of name
 */
#ifndef PW_EMIT_TEMPLATE_H
#define PW_EMIT_TEMPLATE_H

#include "base/arena.h"
#include "base/text.h"

#define PW_TEMPLATE_VALUES 160

typedef struct pw_template_values {
    struct { const char *name, *text; } row[PW_TEMPLATE_VALUES];
    int rows;
    pw_arena *arena;
} pw_template_values;

void pw_template_set(pw_template_values *values, const char *name, const char *text);
void pw_template_set_number(pw_template_values *values, const char *name, long long value);

/* Adds kernel NAME of runtime/kernels/<file> to out. PW_FAILED with a line on stderr where the file,
 * the kernel or a value is missing, or the kernel's own lines are at fault. */
PW_CHECKED pw_status pw_template_expand(const char *file, const char *kernel, const pw_template_values *values,
                                        pw_text *out);

#endif
