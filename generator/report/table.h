/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A table of text with columns aligned by what is seen: UTF-8 counts characters, and colour
 * sequences count nothing. */
#ifndef PW_REPORT_TABLE_H
#define PW_REPORT_TABLE_H

#include "base/text.h"

#define PW_TABLE_COLUMNS 10

typedef struct pw_table {
    const char *align;           /* one letter a column: 'l' left, 'r' right */
    pw_text cells;               /* one after the other, each ended by a 0 */
} pw_table;                      /* {.align = "lrr"} is empty */

/* The next cell, row by row. */
void pw_table_cell(pw_table *table, const char *format, ...) PW_PRINTF(2, 3);

/* Appends all whole rows to out, each indented by so many spaces, two spaces between columns, no
 * space at the end of a line. The table is empty afterwards. */
void pw_table_print(pw_table *table, int indent, pw_text *out);

/* Columns that a text takes on a terminal. */
int pw_text_width(const char *text);
/* Lines that a text takes there. */
int pw_text_lines(const pw_text *text);

#endif
