/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "target/settings.h"

#include <string.h>
#include <yaml.h>

#define MAX_DEPTH 4
#define MAX_ROWS 2048

typedef struct level { bool list; const char *key; } level;   /* key: of this map or list; "" the top */

typedef struct reader {
    pw_arena *arena;
    pw_settings *out;
    pw_messages *messages;
    level stack[MAX_DEPTH];
    int depth;
    const char *pending;         /* a key that waits for its value */
} reader;

static pw_where place(const yaml_event_t *event)
{
    return (pw_where){(int)event->start_mark.line + 1, (int)event->start_mark.column + 1};
}

static const char *joined(reader *r, const char *key)
{
    const level *top = &r->stack[r->depth - 1];
    return *top->key ? pw_arena_print(r->arena, "%s.%s", top->key, key) : pw_arena_copy(r->arena, key);
}

static void add_row(reader *r, const char *key, const char *text, pw_where at)
{
    for (int i = 0; i < r->out->rows && !r->stack[r->depth - 1].list; i++)
        if (!strcmp(r->out->row[i].key, key)) pw_error(r->messages, at, "'%s' stands twice; once is enough", key);
    if (r->out->rows == MAX_ROWS) {
        pw_error(r->messages, at, "more than %d values; what is all this?", MAX_ROWS);
        return;
    }
    r->out->row[r->out->rows++] = (pw_setting){key, pw_arena_copy(r->arena, text), at, false};
}

static void take_scalar(reader *r, const yaml_event_t *event)
{
    const char *text = (const char *)event->data.scalar.value;
    if (r->depth == 0) {
        pw_error(r->messages, place(event), "not a map of settings; expected lines like 'about: ..'");
        return;
    }
    const level *top = &r->stack[r->depth - 1];
    if (top->list) add_row(r, top->key, text, place(event));
    else if (!r->pending) r->pending = joined(r, text);
    else {
        add_row(r, r->pending, text, place(event));
        r->pending = NULL;
    }
}

static void open_level(reader *r, const yaml_event_t *event, bool list)
{
    if (r->depth == MAX_DEPTH || (r->depth == 0 && list)) {
        pw_error(r->messages, place(event), "nested too deeply; expected a map of scalars, lists and maps");
        return;
    }
    const char *key = r->depth ? (r->pending ? r->pending : r->stack[r->depth - 1].key) : "";
    r->stack[r->depth++] = (level){list, key};
    r->pending = NULL;
}

/* 0 at the end of the document. */
static int take_event(reader *r, const yaml_event_t *event)
{
    switch (event->type) {
    case YAML_SCALAR_EVENT: take_scalar(r, event); break;
    case YAML_MAPPING_START_EVENT: open_level(r, event, false); break;
    case YAML_SEQUENCE_START_EVENT: open_level(r, event, true); break;
    case YAML_MAPPING_END_EVENT:
    case YAML_SEQUENCE_END_EVENT: r->depth--; break;
    case YAML_ALIAS_EVENT: pw_error(r->messages, place(event), "an alias; expected plain values"); break;
    case YAML_DOCUMENT_END_EVENT:
    case YAML_STREAM_END_EVENT: return 0;
    default: break;
    }
    return r->messages->errors == 0;
}

pw_status pw_settings_read(const char *text, size_t size, pw_arena *arena, pw_settings *out,
                           pw_messages *messages)
{
    *out = (pw_settings){pw_arena_take(arena, MAX_ROWS * sizeof *out->row), 0};
    reader r = {arena, out, messages, {{0}}, 0, NULL};
    yaml_parser_t parser;
    if (!yaml_parser_initialize(&parser)) return PW_FAILED;
    yaml_parser_set_input_string(&parser, (const unsigned char *)text, size);
    for (int more = 1; more;) {
        yaml_event_t event;
        if (!yaml_parser_parse(&parser, &event)) {
            pw_error(messages, (pw_where){(int)parser.problem_mark.line + 1, (int)parser.problem_mark.column + 1},
                     "not YAML: %s", parser.problem ? parser.problem : "unreadable");
            break;
        }
        more = take_event(&r, &event);
        yaml_event_delete(&event);
    }
    yaml_parser_delete(&parser);
    return messages->errors ? PW_WRONG : PW_OK;
}

const pw_setting *pw_setting_find(pw_settings *settings, const char *key)
{
    const pw_setting *found = NULL;
    for (int i = 0; i < settings->rows; i++) {
        if (strcmp(settings->row[i].key, key)) continue;
        settings->row[i].used = true;
        if (!found) found = &settings->row[i];
    }
    return found;
}
