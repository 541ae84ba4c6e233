/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "emit/template.h"

#include <ctype.h>
#include <limits.h>
#include <stdbool.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/files.h"

#define MAX_KERNEL_FILE (1u << 18)
#define MAX_LINES 1200
#define MAX_WORDS 20
#define ASM_COLUMN 52                    /* where comments beside assembler stand */

void pw_template_set(pw_template_values *values, const char *name, const char *text)
{
    for (int i = 0; i < values->rows; i++)
        if (!strcmp(values->row[i].name, name)) {
            values->row[i].text = text;
            return;
        }
    if (values->rows == PW_TEMPLATE_VALUES) return;
    values->row[values->rows].name = name;
    values->row[values->rows++].text = text;
}

void pw_template_set_number(pw_template_values *values, const char *name, long long value)
{
    pw_template_set(values, name, pw_arena_print(values->arena, "%lld", value));
}

typedef struct expansion {
    const char *file, *kernel;
    pw_arena arena;
    char *line[MAX_LINES];
    int lines;
    pw_template_values values;
    pw_text *out;
    bool failed, in_asm;
} expansion;

static void fail(expansion *e, const char *what, const char *word)
{
    if (!e->failed) fprintf(stderr, "polewright: runtime/kernels/%s, kernel %s: %s '%s'\n", e->file, e->kernel, what, word);
    e->failed = true;
}

static const char *value_of(expansion *e, const char *name)
{
    for (int i = e->values.rows - 1; i >= 0; i--)
        if (!strcmp(e->values.row[i].name, name)) return e->values.row[i].text;
    fail(e, "no value for", name);
    return "0";
}

/* One line with its holes filled, in arena memory. */
static char *filled(expansion *e, const char *line)
{
    pw_text text = {0};
    for (const char *p = line; *p;) {
        if (*p != '$') {
            pw_text_add_bytes(&text, p++, 1);
            continue;
        }
        char name[40];
        size_t n = 0;
        bool braced = p[1] == '{';
        for (p += braced ? 2 : 1; (isalnum((unsigned char)*p) || *p == '_') && n < sizeof name - 1;) name[n++] = *p++;
        name[n] = 0;
        if (braced && *p == '}') p++;
        pw_text_add(&text, value_of(e, name));
    }
    char *copy = pw_arena_copy(&e->arena, pw_text_string(&text));
    pw_text_free(&text);
    return copy;
}

static void put_asm(expansion *e, char *line)
{
    char *comment = strstr(line, "//");
    size_t n = comment ? (size_t)(comment - line) : strlen(line);
    while (n && isspace((unsigned char)line[n - 1])) n--;
    if (!n) return;
    char quoted[300];
    snprintf(quoted, sizeof quoted, "        \"%.*s\\n\"", (int)n, line);
    if (comment) pw_text_print(e->out, "%-*s /*%s */\n", ASM_COLUMN, quoted, comment + 2);
    else pw_text_print(e->out, "%s\n", quoted);
}

static int split(char *line, const char **word)
{
    int n = 0;
    word[0] = "";
    for (char *w = strtok(line, " \t"); w && n < MAX_WORDS; w = strtok(NULL, " \t")) word[n++] = w;
    return n;
}

/* The line of the @end (or @else, where asked) that belongs to the opening just before `from`. */
static int matching(expansion *e, int from, int to, bool or_else)
{
    int depth = 0;
    for (int i = from; i < to; i++) {
        const char *l = e->line[i] + strspn(e->line[i], " ");
        if (!strncmp(l, "@if ", 4) || !strncmp(l, "@body ", 6) || !strncmp(l, "@asm", 4)
            || !strncmp(l, "@repeat ", 8)) depth++;
        else if (!strncmp(l, "@end", 4) && depth-- == 0) return i;
        else if (or_else && !strncmp(l, "@else", 5) && depth == 0) return i;
    }
    fail(e, "no @end for the line before", from < to ? e->line[from] : "the end");
    return to;
}

static void expand(expansion *e, int from, int to);

static int expand_if(expansion *e, int at, int to, const char *name)
{
    bool want = *name != '!';
    const char *word = want ? name : name + 1;            /* a number stands for itself */
    bool holds = strcmp(isdigit((unsigned char)*word) ? word : value_of(e, word), "0") != 0;
    int middle = matching(e, at + 1, to, true), end = middle;
    bool has_else = middle < to && strstr(e->line[middle], "@else");
    if (has_else) end = matching(e, middle + 1, to, false);
    if (holds == want) expand(e, at + 1, middle);
    else if (has_else) expand(e, middle + 1, end);
    return end;
}

static void expand_use(expansion *e, const char **word, int n)
{
    for (int i = 0; i < e->lines; i++) {
        char copy[200];
        const char *p[MAX_WORDS] = {""};
        const char *l = e->line[i] + strspn(e->line[i], " ");
        if (strncmp(l, "@body ", 6)) continue;
        snprintf(copy, sizeof copy, "%s", l);
        int parameters = split(copy, p);
        if (strcmp(p[1], word[1])) continue;
        if (parameters != n) fail(e, "the wrong number of values for", word[1]);
        int before = e->values.rows;
        for (int k = 2; k < n && k < parameters && e->values.rows < PW_TEMPLATE_VALUES; k++) {
            e->values.row[e->values.rows].name = pw_arena_copy(&e->arena, p[k]);
            e->values.row[e->values.rows++].text = pw_arena_copy(&e->arena, word[k]);
        }
        expand(e, i + 1, matching(e, i + 1, e->lines, false));
        e->values.rows = before;
        return;
    }
    fail(e, "no body", word[1]);
}

static void expand(expansion *e, int from, int to)
{
    for (int i = from; i < to && !e->failed; i++) {
        const char *l = e->line[i] + strspn(e->line[i], " ");
        if (*l != '@') {
            char *text = filled(e, e->line[i]);
            if (e->in_asm) put_asm(e, text);
            else pw_text_print(e->out, "%s\n", text);
            continue;
        }
        char *copy = filled(e, l);
        const char *word[MAX_WORDS] = {""};
        int n = split(copy, word);
        if (!strcmp(word[0], "@if") && n == 2) i = expand_if(e, i, to, word[1]);
        else if (!strcmp(word[0], "@body")) i = matching(e, i + 1, to, false);
        else if (!strcmp(word[0], "@use") && n >= 2) expand_use(e, word, n);
        else if (!strcmp(word[0], "@repeat") && n == 2) {
            int end = matching(e, i + 1, to, false);
            for (int times = atoi(value_of(e, word[1])); times > 0; times--) expand(e, i + 1, end);
            i = end;
        } else if (!strcmp(word[0], "@asm")) {
            int end = matching(e, i + 1, to, false);
            e->in_asm = true;
            expand(e, i + 1, end);
            e->in_asm = false;
            i = end;
        } else fail(e, "cannot read", l);
    }
}

/* Keeps the lines of one kernel. */
static void collect(expansion *e, const char *text)
{
    bool inside = false, found = false;
    while (*text) {
        size_t n = strcspn(text, "\n");
        if (!strncmp(text, "@kernel ", 8)) {
            inside = n - 8 == strlen(e->kernel) && !strncmp(text + 8, e->kernel, n - 8);
            found = found || inside;
        } else if (inside && (*text != '#' || isalpha((unsigned char)text[1])) && e->lines < MAX_LINES)
            e->line[e->lines++] = pw_arena_print(&e->arena, "%.*s", (int)n, text);
        text += n + (text[n] == '\n');
    }
    if (!found) fail(e, "there is no kernel", e->kernel);
    while (e->lines && !*e->line[e->lines - 1]) e->lines--;
}

pw_status pw_template_expand(const char *file, const char *kernel, const pw_template_values *values, pw_text *out)
{
    char name[100], path[PATH_MAX];
    snprintf(name, sizeof name, "runtime/kernels/%s", file);
    pw_status status = pw_data_path(name, path, sizeof path);
    if (status) return status;
    pw_text text = {0};
    if (pw_file_read(path, MAX_KERNEL_FILE, &text)) return PW_FAILED;
    expansion e = {.file = file, .kernel = kernel, .values = *values, .out = out};
    collect(&e, pw_text_string(&text));
    if (!e.failed) expand(&e, 0, e.lines);
    pw_arena_free(&e.arena);
    pw_text_free(&text);
    return e.failed ? PW_FAILED : PW_OK;
}
