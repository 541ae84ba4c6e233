/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How text on a terminal is set off, and wrapped. */
#ifndef PW_REPORT_STYLE_H
#define PW_REPORT_STYLE_H

#include <stdbool.h>
#include "base/text.h"

/* Sequences that switch a look on, and back to plain; all empty without colour. */
typedef struct pw_style { const char *strong, *good, *bad, *faint, *plain; } pw_style;

const pw_style *pw_style_of(bool color);

/* Appends body with line breaks between words so that no line passes width columns; the cursor
 * stands at column indent, and further lines start there. A newline ends it. */
void pw_text_wrap(const char *body, int indent, int width, pw_text *out);

#endif
