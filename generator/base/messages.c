/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "base/messages.h"

#include <stdarg.h>
#include <stdlib.h>
#include <string.h>

#include "base/arena.h"

#define MOST_PRINTED 50

struct pw_message {
    pw_where at;
    bool error;
    int order;
    char *text;
};

static void add(pw_messages *messages, pw_where at, bool error, const char *format, va_list args)
{
    char text[1024];
    vsnprintf(text, sizeof text, format, args);
    for (int i = 0; i < messages->count; i++) {
        const struct pw_message *old = &messages->list[i];
        if (old->at.line == at.line && old->at.column == at.column && !strcmp(old->text, text))
            return;
    }
    messages->list = pw_retake(messages->list,
                               (size_t)(messages->count + 1) * sizeof *messages->list);
    char *copy = pw_take(strlen(text) + 1);
    strcpy(copy, text);
    messages->list[messages->count] = (struct pw_message){at, error, messages->count, copy};
    messages->count++;
    messages->errors += error;
}

void pw_error(pw_messages *messages, pw_where at, const char *format, ...)
{
    va_list args;
    va_start(args, format);
    add(messages, at, true, format, args);
    va_end(args);
}

void pw_warning(pw_messages *messages, pw_where at, const char *format, ...)
{
    va_list args;
    va_start(args, format);
    add(messages, at, false, format, args);
    va_end(args);
}

static int by_place(const void *left, const void *right)
{
    const struct pw_message *l = left, *r = right;
    if (l->at.line != r->at.line) {
        bool options = l->at.line < 0 && r->at.line < 0;   /* --set -1, -2, ..: in their order */
        return (l->at.line < r->at.line) != options ? -1 : 1;
    }
    if (l->at.column != r->at.column) return l->at.column < r->at.column ? -1 : 1;
    return l->order < r->order ? -1 : 1;
}

void pw_messages_print(pw_messages *messages, FILE *to, bool errors_only)
{
    int printed = 0, left = 0;
    if (messages->count)
        qsort(messages->list, (size_t)messages->count, sizeof *messages->list, by_place);
    for (int i = 0; i < messages->count; i++) {
        const struct pw_message *m = &messages->list[i];
        if (errors_only && !m->error) continue;
        if (printed == MOST_PRINTED) {
            left++;
            continue;
        }
        printed++;
        const char *kind = m->error ? "" : "warning: ";
        if (m->at.line < 0 && -m->at.line <= messages->n_sets)
            fprintf(to, "--set %s: %s%s\n", messages->sets[-m->at.line - 1], kind, m->text);
        else if (m->at.line > 0)
            fprintf(to, "%s:%d:%d: %s%s\n", messages->file, m->at.line, m->at.column, kind, m->text);
        else
            fprintf(to, "%s: %s%s\n", messages->file, kind, m->text);
    }
    if (left) fprintf(to, "%s: and %d more messages\n", messages->file, left);
    for (int i = 0; i < messages->count; i++) free(messages->list[i].text);
    messages->count = 0;
}

static void forget_options(pw_messages *messages)
{
    for (int i = 0; i < messages->n_sets; i++) free(messages->sets[i]);
    free(messages->sets);
    messages->sets = NULL;
    messages->n_sets = 0;
}

void pw_messages_set_options(pw_messages *messages, const char *const *sets, int n_sets)
{
    forget_options(messages);
    if (n_sets <= 0) return;
    messages->sets = pw_take((size_t)n_sets * sizeof *messages->sets);
    for (int i = 0; i < n_sets; i++)
        messages->sets[i] = strcpy(pw_take(strlen(sets[i]) + 1), sets[i]);
    messages->n_sets = n_sets;
}

void pw_messages_free(pw_messages *messages)
{
    forget_options(messages);
    for (int i = 0; i < messages->count; i++) free(messages->list[i].text);
    free(messages->list);
    messages->list = NULL;
    messages->count = 0;
}
