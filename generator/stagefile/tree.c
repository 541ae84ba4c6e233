/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "stagefile/tree.h"

#include <string.h>
#include <yaml.h>

#include "stagefile/tree_fault.h"

typedef struct anchor {
    struct anchor *older;
    const char *name;
    pw_tree *tree;               /* null while it is being read */
} anchor;

typedef struct builder {
    yaml_parser_t parser;
    pw_arena *arena;
    pw_messages *messages;
    pw_where every;
    anchor *anchors;
    int nodes;
} builder;

static pw_where place(const builder *b, yaml_mark_t mark)
{
    if (b->every.line) return b->every;
    return (pw_where){(int)mark.line + 1, (int)mark.column + 1};
}

/* ---- nodes ---- */

static pw_tree *new_node(pw_arena *arena, pw_tree_kind kind, pw_where at)
{
    pw_tree *node = pw_arena_take(arena, sizeof *node);
    node->kind = kind;
    node->at = at;
    return node;
}

pw_tree *pw_tree_scalar(pw_arena *arena, const char *text, pw_where at)
{
    pw_tree *node = new_node(arena, PW_TREE_SCALAR, at);
    node->text = pw_arena_copy(arena, text);
    return node;
}

pw_tree *pw_tree_map(pw_arena *arena, pw_where at)
{
    return new_node(arena, PW_TREE_MAP, at);
}

static void *grown(pw_arena *arena, const void *old, int count, int room, size_t size)
{
    void *p = pw_arena_take(arena, (size_t)room * size);
    if (count) memcpy(p, old, (size_t)count * size);
    return p;
}

static void append(pw_arena *arena, pw_tree *node, const char *key, pw_where key_at, pw_tree *value)
{
    if (node->count == node->room) {
        node->room = node->room ? 2 * node->room : 8;
        node->item = grown(arena, node->item, node->count, node->room, sizeof *node->item);
        if (node->kind == PW_TREE_MAP) {
            node->key = grown(arena, node->key, node->count, node->room, sizeof *node->key);
            node->key_at = grown(arena, node->key_at, node->count, node->room,
                                 sizeof *node->key_at);
        }
    }
    if (node->kind == PW_TREE_MAP) {
        node->key[node->count] = key;
        node->key_at[node->count] = key_at;
    }
    node->item[node->count++] = value;
}

static int find(const pw_tree *map, const char *key)
{
    for (int i = 0; map && map->kind == PW_TREE_MAP && i < map->count; i++)
        if (!strcmp(map->key[i], key)) return i;
    return -1;
}

pw_tree *pw_tree_find(const pw_tree *map, const char *key)
{
    int i = find(map, key);
    return i < 0 ? NULL : map->item[i];
}

void pw_tree_put(pw_arena *arena, pw_tree *map, const char *key, pw_where key_at, pw_tree *value)
{
    int i = find(map, key);
    if (i < 0) append(arena, map, pw_arena_copy(arena, key), key_at, value);
    else {
        map->item[i] = value;
        map->key_at[i] = key_at;
    }
}

bool pw_tree_is_empty(const pw_tree *node)
{
    return node->kind == PW_TREE_SCALAR && !node->quoted && !*node->text;
}

const char *pw_tree_phrase(const pw_tree *node)
{
    if (node->kind == PW_TREE_LIST) return "a list";
    if (node->kind == PW_TREE_MAP) return "a map";
    return pw_tree_is_empty(node) ? "no value" : "text";
}

/* ---- from events ---- */

static bool next(builder *b, yaml_event_t *event)
{
    if (yaml_parser_parse(&b->parser, event)) return true;
    pw_tree_tell_fault(&b->parser, b->every, b->messages);
    return false;
}

static bool count_node(builder *b, pw_where at, int level, bool holds_others)
{
    if (holds_others && level > PW_TREE_MOST_LEVELS) {
        pw_error(b->messages, at, "more than %d levels of lists and maps inside each other; "
                 "expected a flatter file", PW_TREE_MOST_LEVELS);
        return false;
    }
    if (++b->nodes > PW_TREE_MOST_NODES) {
        pw_error(b->messages, at, "more than %d values, aliases counted as what they stand for; "
                 "expected a smaller file", PW_TREE_MOST_NODES);
        return false;
    }
    return true;
}

/* A copy, so that an override of one use of an anchor leaves the others alone. */
static pw_tree *copy(builder *b, const pw_tree *from, int level, pw_where at)
{
    if (!count_node(b, at, level, from->kind != PW_TREE_SCALAR)) return NULL;
    pw_tree *to = new_node(b->arena, from->kind, from->at);
    to->text = from->text;
    to->quoted = from->quoted;
    for (int i = 0; i < from->count; i++) {
        pw_tree *item = copy(b, from->item[i], level + 1, at);
        if (!item) return NULL;
        bool map = from->kind == PW_TREE_MAP;
        append(b->arena, to, map ? from->key[i] : NULL, map ? from->key_at[i] : at, item);
    }
    return to;
}

static pw_tree *alias(builder *b, const char *name, pw_where at, int level)
{
    for (const anchor *a = b->anchors; a; a = a->older) {
        if (strcmp(a->name, name)) continue;
        if (a->tree) return copy(b, a->tree, level, at);
        pw_error(b->messages, at, "the alias *%s stands inside its own anchor; expected an anchor "
                 "that ends before it", name);
        return NULL;
    }
    pw_error(b->messages, at, "the alias *%s has no anchor; expected &%s at an earlier value", name,
             name);
    return NULL;
}

static anchor *open_anchor(builder *b, const yaml_char_t *name)
{
    if (!name) return NULL;
    anchor *a = pw_arena_take(b->arena, sizeof *a);
    a->name = pw_arena_copy(b->arena, (const char *)name);
    a->older = b->anchors;
    return b->anchors = a;
}

static void refuse_tag(builder *b, const yaml_char_t *tag, pw_where at)
{
    static const char standard[] = "tag:yaml.org,2002:";
    if (!tag || !strcmp((const char *)tag, "!")) return;
    if (strncmp((const char *)tag, standard, sizeof standard - 1))
        pw_error(b->messages, at, "the tag %.40s has no meaning here; take it out",
                 (const char *)tag);
}

static pw_tree *node(builder *b, yaml_event_t *event, int level);

static pw_tree *scalar(builder *b, const yaml_event_t *event, pw_where at)
{
    const char *text = (const char *)event->data.scalar.value;
    pw_where inside;
    const char *fault = pw_utf8_fault(text, event->data.scalar.length, &inside);
    if (fault) {
        pw_error(b->messages, at, "%s in a value; expected printable text", fault);
        text = "";
    }
    pw_tree *made = pw_tree_scalar(b->arena, text, at);
    made->quoted = fault || event->data.scalar.style != YAML_PLAIN_SCALAR_STYLE;
    return made;
}

/* Null at the end of the collection or, with *failed, where reading cannot go on. */
static pw_tree *item(builder *b, yaml_event_type_t end, int level, bool *failed)
{
    yaml_event_t event;
    *failed = !next(b, &event);
    if (*failed) return NULL;
    if (event.type == end) {
        yaml_event_delete(&event);
        return NULL;
    }
    pw_tree *made = node(b, &event, level);
    *failed = !made;
    return made;
}

static bool fill_list(builder *b, pw_tree *list, int level)
{
    bool failed;
    pw_tree *value;
    while ((value = item(b, YAML_SEQUENCE_END_EVENT, level + 1, &failed)))
        append(b->arena, list, NULL, list->at, value);
    return !failed;
}

static void add_pair(builder *b, pw_tree *map, const pw_tree *key, pw_tree *value)
{
    int old;
    if (key->kind != PW_TREE_SCALAR)
        pw_error(b->messages, key->at, "%s as a key; expected a name", pw_tree_phrase(key));
    else if (!strcmp(key->text, "<<") && !key->quoted)
        pw_error(b->messages, key->at,
                 "merge keys (<<) are not read; expected the keys themselves, "
                 "or an alias for a whole value");
    else if ((old = find(map, key->text)) >= 0) {
        if (map->key_at[old].line > 0)
            pw_error(b->messages, key->at,
                     "the key '%.40s' stands twice in one map, first on line %d; "
                     "expected it once",
                     key->text, map->key_at[old].line);
        else
            pw_error(b->messages, key->at,
                     "the key '%.40s' stands twice in one map; expected it once", key->text);
    } else append(b->arena, map, key->text, key->at, value);
}

static bool fill_map(builder *b, pw_tree *map, int level)
{
    for (;;) {
        bool failed;
        pw_tree *key = item(b, YAML_MAPPING_END_EVENT, level + 1, &failed);
        if (!key) return !failed;
        pw_tree *value = item(b, YAML_NO_EVENT, level + 1, &failed);
        if (!value) return false;
        add_pair(b, map, key, value);
    }
}

static pw_tree *collection(builder *b, pw_tree_kind kind, pw_where at, int level)
{
    pw_tree *made = new_node(b->arena, kind, at);
    bool whole = kind == PW_TREE_LIST ? fill_list(b, made, level) : fill_map(b, made, level);
    return whole ? made : NULL;
}

/* The node that an event begins; the event is used up. Null where reading cannot go on. */
static pw_tree *node(builder *b, yaml_event_t *event, int level)
{
    pw_where at = place(b, event->start_mark);
    bool is_scalar = event->type == YAML_SCALAR_EVENT,
         is_list = event->type == YAML_SEQUENCE_START_EVENT;
    pw_tree *made = NULL;
    if (event->type == YAML_ALIAS_EVENT)
        made = alias(b, (const char *)event->data.alias.anchor, at, level);
    else if (count_node(b, at, level, !is_scalar)) {
        const yaml_char_t *tag = is_scalar ? event->data.scalar.tag
                                 : is_list ? event->data.sequence_start.tag
                                           : event->data.mapping_start.tag;
        anchor *open = open_anchor(b, is_scalar ? event->data.scalar.anchor
                                 : is_list ? event->data.sequence_start.anchor
                                           : event->data.mapping_start.anchor);
        refuse_tag(b, tag, at);
        made = is_scalar ? scalar(b, event, at)
                         : collection(b, is_list ? PW_TREE_LIST : PW_TREE_MAP, at, level);
        if (open) open->tree = made;
    }
    yaml_event_delete(event);
    return made;
}

static pw_tree *document(builder *b)
{
    yaml_event_t event;
    pw_tree *root = NULL;
    for (bool more = true; more;) {
        if (!next(b, &event)) return NULL;
        yaml_event_type_t type = event.type;
        pw_where at = place(b, event.start_mark);
        if (type == YAML_DOCUMENT_START_EVENT && root) {
            pw_error(b->messages, at,
                     "a second YAML document begins here; expected one stage in a file");
            more = false;
        }
        if (type == YAML_STREAM_START_EVENT || type == YAML_DOCUMENT_START_EVENT
            || type == YAML_DOCUMENT_END_EVENT || type == YAML_STREAM_END_EVENT) {
            yaml_event_delete(&event);
            if (type == YAML_STREAM_END_EVENT) more = false;
        } else if (!(root = node(b, &event, 1))) return NULL;
    }
    return root;
}

pw_status pw_tree_parse(const char *bytes, size_t size, pw_where every, pw_arena *arena,
                        pw_tree **out, pw_messages *messages)
{
    static const char mark[] = "\xef\xbb\xbf";
    int before = messages->errors;
    *out = NULL;
    if (size > PW_TREE_MOST_BYTES) {
        pw_error(messages, every, "the text is larger than %d bytes; expected a smaller file",
                 PW_TREE_MOST_BYTES);
        return PW_WRONG;
    }
    if (size >= 3 && !memcmp(bytes, mark, 3)) bytes += 3, size -= 3;
    pw_where at;
    const char *fault = pw_utf8_fault(bytes, size, &at);
    if (fault) {
        pw_error(messages, every.line ? every : at, "%s; expected UTF-8 text", fault);
        return PW_WRONG;
    }
    builder b = {.arena = arena, .messages = messages, .every = every};
    if (!yaml_parser_initialize(&b.parser)) return PW_FAILED;
    yaml_parser_set_encoding(&b.parser, YAML_UTF8_ENCODING);
    yaml_parser_set_input_string(&b.parser, (const unsigned char *)bytes, size);
    *out = document(&b);
    yaml_parser_delete(&b.parser);
    return messages->errors > before ? PW_WRONG : PW_OK;
}
