/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/table.h"

#include <stdarg.h>
#include <stdio.h>
#include <string.h>

#define GAP 2

void pw_table_cell(pw_table *table, const char *format, ...)
{
    char cell[512];
    va_list args;
    va_start(args, format);
    vsnprintf(cell, sizeof cell, format, args);
    va_end(args);
    pw_text_add_bytes(&table->cells, cell, strlen(cell) + 1);
}

int pw_text_width(const char *text)
{
    int width = 0;
    for (const unsigned char *c = (const unsigned char *)text; *c; c++) {
        if (*c == 0x1b) {
            while (*c && *c != 'm') c++;
            if (!*c) break;
        } else if ((*c & 0xc0) != 0x80)
            width++;
    }
    return width;
}

int pw_text_lines(const pw_text *text)
{
    int n = 0;
    for (const char *c = pw_text_string(text); *c; c++) n += *c == '\n';
    return n;
}

/* The text after this cell; null after the last. */
static const char *next(const pw_table *table, const char *cell)
{
    cell += strlen(cell) + 1;
    return cell < table->cells.data + table->cells.size ? cell : NULL;
}

static void measure(const pw_table *table, int columns, int *width)
{
    int column = 0;
    for (const char *c = table->cells.data; c; c = next(table, c)) {
        int w = pw_text_width(c);
        if (w > width[column]) width[column] = w;
        column = (column + 1) % columns;
    }
}

static void put_row(const pw_table *table, const char **cell, int columns, const int *width,
                    int indent, pw_text *out)
{
    int owed = indent;           /* spaces that are due before the next visible character */
    for (int i = 0; i < columns && *cell; i++, *cell = next(table, *cell)) {
        int pad = width[i] - pw_text_width(*cell);
        if (table->align[i] == 'r') owed += pad;
        if (**cell) {
            pw_text_print(out, "%*s%s", owed, "", *cell);
            owed = 0;
        }
        if (table->align[i] != 'r') owed += pad;
        owed += GAP;
    }
    pw_text_add(out, "\n");
}

void pw_table_print(pw_table *table, int indent, pw_text *out)
{
    int columns = (int)strlen(table->align), width[PW_TABLE_COLUMNS] = {0};
    if (table->cells.size) {
        measure(table, columns, width);
        for (const char *cell = table->cells.data; cell;)
            put_row(table, &cell, columns, width, indent, out);
    }
    pw_text_free(&table->cells);
}
