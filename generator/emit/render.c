/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The one place that turns code items into text. */
#include <inttypes.h>
#include <stdio.h>
#include <string.h>

#include "emit/code.h"

enum { WIDTH = 100, STEP = 4 };

static void indent_by(pw_text *out, int columns)
{
    static const char blanks[] = "                                                                ";
    int room = (int)sizeof blanks - 1;
    pw_text_add_bytes(out, blanks, (size_t)(columns < room ? columns : room));
}

/* ---- numbers ---- */

static void render_integer(int64_t value, pw_text *out)
{
    if (value >= -32767 && value <= 32767) {
        pw_text_print(out, "%" PRId64, value);
    } else if (value == INT64_MIN) {
        pw_text_print(out, "(-INT64_C(%" PRId64 ") - 1)", INT64_MAX);
    } else if (value == INT32_MIN) {
        pw_text_print(out, "(-INT32_C(%" PRId32 ") - 1)", INT32_MAX);
    } else {
        int64_t magnitude = value < 0 ? -value : value;
        pw_text_print(out, "%sINT%d_C(%" PRId64 ")", value < 0 ? "-" : "",
                      magnitude <= INT32_MAX ? 32 : 64, magnitude);
    }
}

void pw_number_render(pw_number number, pw_text *out)
{
    char buffer[PW_NUMBER_ROOM];
    if (number.kind == PW_WORD) {
        render_integer(number.word, out);
        return;
    }
    if (number.kind == PW_SINGLE)
        pw_shortest_float(buffer, (float)number.real);
    else
        pw_shortest(buffer, number.real);
    pw_text_add(out, buffer);
    if (!strpbrk(buffer, ".e")) pw_text_add(out, ".0");
    if (number.kind == PW_SINGLE) pw_text_add(out, "f");
}

/* ---- lines ---- */

/* The item's text with $, @ and # replaced. */
static void expand(const pw_code *item, const char *text, pw_text *out)
{
    for (const char *c = text; *c; c++) {
        if (*c == '$')
            pw_text_add(out, item->stage);
        else if (*c == '@')
            pw_text_add(out, item->sample);
        else if (*c == '#' && item->kind != PW_CODE_DIRECTIVE)
            pw_text_print(out, "%d", item->section);
        else if (*c == '`')
            pw_text_print(out, "%d", item->section - 1);
        else
            pw_text_add_bytes(out, c, 1);
    }
}

/* A line of code is best broken before an operator or after a comma, prose at any space. */
static bool good_break(const char *text, size_t i, bool code)
{
    return !code || text[i - 1] == ',' || (strchr("+-&|?:", text[i + 1]) && text[i + 2] == ' ')
           || !strncmp(text + i + 1, "&& ", 3) || !strncmp(text + i + 1, ">> ", 3);
}

/* Where to break text so that it fits: the last good space within room, else the last space, else
 * the first one after. */
static size_t break_at(const char *text, size_t size, size_t room, bool code)
{
    size_t good = 0, any = 0, i = 1;
    if (size <= room) return size;
    for (; i < size && i <= room; i++) {
        if (text[i] != ' ') continue;
        any = i;
        if (good_break(text, i, code)) good = i;
    }
    if (good > room / 2 || (good && !any)) return good;
    if (any) return any;
    while (i < size && text[i] != ' ') i++;
    return i;
}

/* Code: continuation lines stand two steps in. */
static void put_code(const char *text, int indent, pw_text *out)
{
    size_t size = strlen(text);
    for (int at = indent;; at = indent + 2 * STEP) {
        size_t n = break_at(text, size, (size_t)(WIDTH - at), true);
        indent_by(out, at);
        pw_text_add_bytes(out, text, n);
        pw_text_add(out, "\n");
        if (n == size) return;
        text += n + 1;
        size -= n + 1;
    }
}

/* ---- comments ---- */

/* How many bytes of prose at c must not reach a comment: control characters, and the marks that
 * turn the direction of writing (U+202A-202E, U+2066-2069), at which compilers rightly warn. */
static int harmful(const char *c)
{
    const unsigned char *u = (const unsigned char *)c;
    if (u[0] < 0x20 || u[0] == 0x7f) return 1;
    if (u[0] == 0xe2 && u[1] == 0x80 && u[2] >= 0xaa && u[2] <= 0xae) return 3;
    if (u[0] == 0xe2 && u[1] == 0x81 && u[2] >= 0xa6 && u[2] <= 0xa9) return 3;
    return 0;
}

/* Prose that cannot end a comment, open another, form a trigraph or continue a line. */
static void soften(const char *prose, pw_text *out)
{
    for (const char *c = prose; *c; c++) {
        int skip = harmful(c);
        if (skip) {
            pw_text_add(out, " ");
            c += skip - 1;
            continue;
        }
        pw_text_add_bytes(out, c, 1);
        if ((c[0] == '*' && c[1] == '/') || (c[0] == '/' && c[1] == '*')
            || (c[0] == '?' && c[1] == '?'))
            pw_text_add(out, " ");
        if (c[0] == '\\' && c[1] == 0) pw_text_add(out, " .");
    }
}

/* One paragraph; lines after the first are led by " * ". Leading blanks of the prose are kept. */
static void put_paragraph(const char *prose, int indent, bool first, bool closes, pw_text *out)
{
    pw_text soft = {0};
    soften(prose, &soft);
    const char *text = pw_text_string(&soft);
    int hang = (int)strspn(text, " ");
    size_t size = strlen(text);
    for (bool begin = true;; begin = false) {
        size_t room = (size_t)(WIDTH - indent - 6 - (begin ? 0 : hang));
        size_t n = break_at(text, size, room, false);
        indent_by(out, indent);
        pw_text_add(out, first && begin ? "/*" : " *");
        if (n) pw_text_add(out, " ");
        if (!begin) indent_by(out, hang);
        pw_text_add_bytes(out, text, n);
        if (n == size) break;
        pw_text_add(out, "\n");
        text += n + 1;
        size -= n + 1;
    }
    pw_text_add(out, closes ? " */\n" : "\n");
    pw_text_free(&soft);
}

static void put_comment(const pw_code *item, int indent, pw_text *out)
{
    for (const pw_code *line = item->first; line; line = line->next)
        put_paragraph(line->text, indent, line == item->first, !line->next, out);
}

/* A line of code and its note: beside it where both fit, else above it. */
static void put_noted(const char *code, const char *note, int indent, pw_text *out)
{
    if (!note) {
        put_code(code, indent, out);
        return;
    }
    pw_text soft = {0};
    soften(note, &soft);
    if (indent + strlen(code) + soft.size + 9 <= WIDTH) {
        indent_by(out, indent);
        pw_text_print(out, "%s   /* %s */\n", code, pw_text_string(&soft));
    } else {
        put_paragraph(note, indent, true, true, out);
        put_code(code, indent, out);
    }
    pw_text_free(&soft);
}

/* ---- arrays ---- */

static void put_array(const pw_code *item, int indent, pw_text *out)
{
    pw_text line = {0};
    expand(item, item->text, &line);
    pw_text_add(&line, " = {");
    put_code(pw_text_string(&line), indent, out);
    line.size = 0;
    for (long i = 0; i < item->count; i++) {
        size_t before = line.size;
        pw_number number = item->number;
        if (item->words)
            number.word = item->words[i];
        else
            number.real = item->reals[i];
        pw_text_add(&line, before ? " " : "");
        pw_number_render(number, &line);
        pw_text_add(&line, ",");
        if (line.size + (size_t)indent + STEP > WIDTH && before) {
            indent_by(out, indent + STEP);
            pw_text_add_bytes(out, line.data, before);
            pw_text_add(out, "\n");
            memmove(line.data, line.data + before + 1, line.size - before - 1);
            line.size -= before + 1;
        }
    }
    indent_by(out, indent + STEP);
    pw_text_add_bytes(out, line.data, line.size);
    pw_text_add(out, "\n");
    put_code("};", indent, out);
    pw_text_free(&line);
}

/* ---- the tree ---- */

static void render(const pw_code *item, int indent, pw_text *out);

static void render_children(const pw_code *item, int indent, pw_text *out)
{
    for (const pw_code *child = item->first; child; child = child->next) render(child, indent, out);
}

static void render_braces(const pw_code *item, int indent, pw_text *out)
{
    pw_text head = {0}, tail = {0};
    bool own_line = item->kind == PW_CODE_FUNCTION;
    expand(item, item->text, &head);
    if (!own_line) pw_text_add(&head, head.size ? " {" : "{");
    put_code(pw_text_string(&head), indent, out);
    if (own_line) put_code("{", indent, out);
    render_children(item, indent + STEP, out);
    pw_text_add(&tail, "}");
    expand(item, item->tail, &tail);
    put_code(pw_text_string(&tail), indent, out);
    pw_text_free(&head);
    pw_text_free(&tail);
}

static void render_line(const pw_code *item, int indent, pw_text *out)
{
    pw_text line = {0};
    expand(item, item->text, &line);
    if (item->kind == PW_CODE_CONSTANT) pw_text_add(&line, " = ");
    if (item->kind != PW_CODE_LINE) pw_number_render(item->number, &line);
    if (item->kind == PW_CODE_CONSTANT) pw_text_add(&line, ";");
    if (item->kind == PW_CODE_ENTRY) pw_text_add(&line, ",");
    put_noted(pw_text_string(&line), item->note, indent, out);
    pw_text_free(&line);
}

static void render(const pw_code *item, int indent, pw_text *out)
{
    switch (item->kind) {
    case PW_CODE_FILE: render_children(item, indent, out); break;
    case PW_CODE_COMMENT: put_comment(item, indent, out); break;
    case PW_CODE_PARAGRAPH: break;
    case PW_CODE_DIRECTIVE:
        expand(item, item->text, out);
        pw_text_add(out, "\n");
        break;
    case PW_CODE_LINE:
    case PW_CODE_CONSTANT:
    case PW_CODE_ENTRY: render_line(item, indent, out); break;
    case PW_CODE_ARRAY: put_array(item, indent, out); break;
    case PW_CODE_BLOCK:
    case PW_CODE_FUNCTION: render_braces(item, indent, out); break;
    case PW_CODE_RAW: pw_text_add(out, item->text); break;
    case PW_CODE_BLANK: pw_text_add(out, "\n"); break;
    }
}

void pw_code_render(const pw_code *file, pw_text *out) { render(file, 0, out); }
