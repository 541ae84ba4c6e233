/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Building the tree. */
#include "emit/code.h"

#include <stdarg.h>
#include <stdio.h>
#include <string.h>

#include "base/arena.h"

static pw_code *append(pw_code *in, pw_code_kind kind, const char *text)
{
    pw_code *item = pw_arena_take(in->arena, sizeof *item);
    item->kind = kind;
    item->text = text;
    item->tail = "";
    item->stage = in->stage;
    item->sample = in->sample;
    item->section = in->section;
    item->arena = in->arena;
    if (in->last)
        in->last->next = item;
    else
        in->first = item;
    in->last = item;
    return item;
}

pw_code *pw_code_file(pw_arena *arena, const char *stage, const char *sample)
{
    pw_code *file = pw_arena_take(arena, sizeof *file);
    *file = (pw_code){.kind = PW_CODE_FILE, .stage = stage, .sample = sample, .arena = arena};
    return file;
}

void pw_put(pw_code *in, const char *line) { append(in, PW_CODE_LINE, line); }
void pw_directive(pw_code *in, const char *text) { append(in, PW_CODE_DIRECTIVE, text); }
void pw_raw(pw_code *in, const char *lines) { append(in, PW_CODE_RAW, lines); }
void pw_blank(pw_code *in) { append(in, PW_CODE_BLANK, ""); }
pw_code *pw_function(pw_code *in, const char *head) { return append(in, PW_CODE_FUNCTION, head); }
pw_code *pw_comment(pw_code *in) { return append(in, PW_CODE_COMMENT, ""); }

void pw_put_with(pw_code *in, const char *line, const char *note)
{
    append(in, PW_CODE_LINE, line)->note = note;
}

void pw_constant(pw_code *in, const char *declaration, pw_number number, const char *note)
{
    pw_code *item = append(in, PW_CODE_CONSTANT, declaration);
    item->number = number;
    item->note = note;
}

void pw_assign(pw_code *in, const char *what, pw_number number)
{
    pw_constant(in, what, number, NULL);
}

void pw_extern_c(pw_code *file, bool opens)
{
    pw_directive(file, "#ifdef __cplusplus");
    pw_put(file, opens ? "extern \"C\" {" : "}");
    pw_directive(file, "#endif");
}

void pw_entry(pw_code *in, pw_number number, const char *note)
{
    pw_code *item = append(in, PW_CODE_ENTRY, "");
    item->number = number;
    item->note = note;
}

void pw_array_words(pw_code *in, const char *declaration, const int32_t *words, long count)
{
    pw_code *item = append(in, PW_CODE_ARRAY, declaration);
    item->words = words;
    item->count = count;
}

void pw_array_reals(pw_code *in, const char *declaration, const double *reals, long count,
                    bool single)
{
    pw_code *item = append(in, PW_CODE_ARRAY, declaration);
    item->reals = reals;
    item->count = count;
    item->number.kind = single ? PW_SINGLE : PW_DOUBLE;
}

pw_code *pw_block(pw_code *in, const char *head, const char *tail)
{
    pw_code *item = append(in, PW_CODE_BLOCK, head);
    item->tail = tail;
    return item;
}

void pw_comment_line(pw_code *in, const char *prose)
{
    append(pw_comment(in), PW_CODE_PARAGRAPH, prose);
}

void pw_prose(pw_code *comment, const char *format, ...)
{
    va_list args;
    char *text = NULL;
    va_start(args, format);
    int n = vsnprintf(NULL, 0, format, args);
    va_end(args);
    text = pw_arena_take(comment->arena, (size_t)n + 1);
    va_start(args, format);
    vsnprintf(text, (size_t)n + 1, format, args);
    va_end(args);
    append(comment, PW_CODE_PARAGRAPH, text);
}

pw_code *pw_section_group(pw_code *in, int section)
{
    pw_code *group = append(in, PW_CODE_FILE, "");
    group->section = section;
    return group;
}

bool pw_once(pw_code *file, const char *key)
{
    for (const pw_code *item = file->first; item; item = item->next)
        if (item->kind == PW_CODE_FILE && item->note && !strcmp(item->note, key)) return false;
    append(file, PW_CODE_FILE, "")->note = key;
    return true;
}

pw_number pw_word(int64_t value) { return (pw_number){.kind = PW_WORD, .word = value}; }

pw_number pw_real(double value, bool single)
{
    return (pw_number){.kind = single ? PW_SINGLE : PW_DOUBLE, .real = value};
}
