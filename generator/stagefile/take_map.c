/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A map by the table: dispatch, defaults, and what its keys have to do with each other. */
#include <stdio.h>
#include <string.h>

#include "base/nearest.h"
#include "stagefile/take.h"

#define MOST_KEYS 64

typedef enum truth { NO, YES, UNKNOWN } truth;

/* Whether one alternative of "a|b|c" equals the word. */
static bool is_listed(const char *list, const char *word)
{
    size_t n = strlen(word);
    for (const char *p = list; p; p = strchr(p, '|')) {
        if (*p == '|') p++;
        if (!strncmp(p, word, n) && (p[n] == '|' || !p[n])) return true;
    }
    return false;
}

static bool is_known_word(const pw_key *key, const char *text)
{
    for (int i = 0; key && key->words && key->words[i].word; i++)
        if (!strcmp(key->words[i].word, text)) return true;
    return false;
}

/* Whether none of the keys that share a key's choice stands in a map. */
static bool choice_is_open(const char *list, const char *map, const pw_tree *node)
{
    char name[48];
    snprintf(name, sizeof name, "%.*s", (int)strcspn(list, "|"), list);
    const pw_key *first = pw_key_find(map, name);
    for (int i = 0; i < node->count; i++) {
        const pw_key *key = pw_key_find(map, node->key[i]);
        if (key && key->choice == first->choice) return false;
    }
    return first->choice > 0;
}

/* Whether a condition of the table holds in a map; UNKNOWN where the key it asks for is missing or
 * mistyped, which is a fault of its own. */
static truth holds(const char *condition, const char *map, const pw_tree *node)
{
    if (!condition) return YES;
    const char *equals = strchr(condition, '=');
    if (!equals) {
        for (int i = 0; i < node->count; i++)
            if (is_listed(condition, node->key[i])) return YES;
        return choice_is_open(condition, map, node) ? UNKNOWN : NO;
    }
    char name[48];
    snprintf(name, sizeof name, "%.*s", (int)(equals - condition), condition);
    const pw_tree *value = pw_tree_find(node, name);
    if (!value || value->kind != PW_TREE_SCALAR
        || !is_known_word(pw_key_find(map, name), value->text))
        return UNKNOWN;
    return is_listed(equals + 1, value->text) ? YES : NO;
}

/* "a|b|c" as "a, b, c", "key=a|b" as "key: a, b". */
static const char *condition_phrase(pw_text *out, const char *condition)
{
    for (const char *p = condition; *p; p++) {
        if (*p == '|') pw_text_add(out, ", ");
        else if (*p == '=') pw_text_add(out, ": ");
        else pw_text_add_bytes(out, p, 1);
    }
    return pw_text_string(out);
}

static const char *map_phrase(const char *map) { return *map ? map : "the stage file"; }

/* ---- unknown keys ---- */

static const pw_key_map *map_named(const char *map)
{
    int i = 0;
    while (strcmp(pw_key_maps[i].map, map)) i++;
    return &pw_key_maps[i];
}

/* "it belongs in transform", for a key that other maps know; false where none does. */
static bool add_home(pw_text *out, const char *name)
{
    const char *last = NULL;
    int n = 0;
    for (int i = 0; i < pw_key_count && n < 3; i++) {
        if (strcmp(pw_keys[i].name, name) || (last && !strcmp(pw_keys[i].map, last))) continue;
        pw_text_print(out, "%s%s", n++ ? " or " : "it belongs in ", map_phrase(pw_keys[i].map));
        last = pw_keys[i].map;
    }
    return n > 0;
}

static void add_choices(pw_text *out, const char *const *known, int n)
{
    pw_text_add(out, n ? "expected one of " : "expected nothing more");
    for (int i = 0; i < n; i++) pw_text_print(out, "%s%s", i ? ", " : "", known[i]);
}

static void tell_unknown(pw_reader *reader, const char *map, const pw_tree *node, int index)
{
    const char *known[MOST_KEYS] = {0};
    char shown[PW_SHOWN_ROOM];
    int n = 0;
    for (int i = 0; i < pw_key_count && n < MOST_KEYS; i++)
        if (!strcmp(pw_keys[i].map, map) && !pw_tree_find(node, pw_keys[i].name))
            known[n++] = pw_keys[i].name;
    const char *near = pw_nearest(node->key[index], known, n);
    pw_text hint = {0};
    if (near) pw_text_print(&hint, "did you mean '%s'?", near);
    else if (!add_home(&hint, node->key[index])) add_choices(&hint, known, n);
    pw_error(reader->messages, node->key_at[index], "unknown key %s in %s; %s",
             pw_shown(shown, node->key[index]), map_phrase(map), pw_text_string(&hint));
    pw_text_free(&hint);
}

static void tell_unknowns(pw_reader *reader, const char *map, const pw_tree *node)
{
    if (map_named(map)->free_names) return;
    for (int i = 0; i < node->count; i++) {
        if (pw_key_find(map, node->key[i])) continue;
        if (pw_key_later(map, node->key[i], NULL))
            pw_error(reader->messages, node->key_at[i], "%s does not work yet; take the key out",
                     node->key[i]);
        else tell_unknown(reader, map, node, i);
    }
}

/* ---- missing and misplaced keys ---- */

/* Whether a key of the node that is told as unknown or misplaced most likely means this one. */
static bool is_mistyped(const pw_key *key, const pw_tree *node)
{
    for (int i = 0; i < node->count; i++) {
        const pw_key *other = pw_key_find(key->map, node->key[i]);
        bool told = !other || holds(other->only_with, key->map, node) == NO;
        if (told && pw_nearest(node->key[i], &key->name, 1)) return true;
    }
    return false;
}

static void tell_missing(pw_reader *reader, const pw_key *key, const pw_tree *node)
{
    if (is_mistyped(key, node)) return;
    char path[PW_KEY_ROOM];
    pw_text expected = {0};
    pw_key_expected(key, &expected);
    pw_error(reader->messages, node->at, "%s is missing; expected %s", pw_key_path(path, key),
             pw_text_string(&expected));
    pw_text_free(&expected);
}

static void tell_misplaced(pw_reader *reader, const pw_key *key, const pw_tree *node)
{
    char path[PW_KEY_ROOM];
    pw_text phrase = {0};
    for (int i = 0; i < node->count; i++)
        if (!strcmp(node->key[i], key->name))
            pw_error(reader->messages, node->key_at[i], "%s has no meaning here; it goes with %s",
                     pw_key_path(path, key), condition_phrase(&phrase, key->only_with));
    pw_text_free(&phrase);
}

/* Of the keys with one choice number exactly one stands, where their condition holds. */
static void check_choice(pw_reader *reader, const char *map, const pw_tree *node, int choice)
{
    const pw_key *found = NULL;
    bool open = false, mistyped = false;
    pw_text names = {0};
    for (int i = 0; i < pw_key_count; i++) {
        const pw_key *key = &pw_keys[i];
        if (strcmp(key->map, map) || key->choice != choice) continue;
        if (holds(key->only_with, map, node) == YES) open = true;
        mistyped |= is_mistyped(key, node);
        pw_text_print(&names, "%s%s", names.size ? ", " : "", key->name);
    }
    for (int i = 0; i < node->count; i++) {
        const pw_key *key = pw_key_find(map, node->key[i]);
        if (!key || key->choice != choice) continue;
        if (found)
            pw_error(reader->messages, node->key_at[i],
                     "%s: %s beside %s; expected exactly one of %s", map_phrase(map), key->name,
                     found->name, pw_text_string(&names));
        found = key;
    }
    if (!found && open && !mistyped)
        pw_error(reader->messages, node->at, "%s: a key is missing; expected exactly one of %s",
                 map_phrase(map), pw_text_string(&names));
    pw_text_free(&names);
}

/* ---- the map ---- */

/* Keeps "KEY: DEFAULT" for the report, once. */
static void state_default(pw_reader *reader, const pw_key *key)
{
    char path[PW_KEY_ROOM];
    const char *value = key->fallback ? key->fallback : key->otherwise;
    if (!value || !*value || !strcmp(value, "not judged") || !map_named(key->map)->stated) return;
    const char *line = pw_arena_print(reader->arena, "%s: %s", pw_key_path(path, key), value);
    for (int i = 0; i < reader->n_taken; i++)
        if (!strcmp(reader->taken[i], line)) return;
    reader->taken[reader->n_taken++] = line;
}

static void take_default(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    if (!node || !key->only_with || holds(key->only_with, key->map, node) == YES)
        state_default(reader, key);
    if (key->take == pw_take_submap && !key->needed) pw_take_submap(reader, key, NULL, base);
    if (!key->fallback) return;
    const pw_where nowhere = {0, 0};
    key->take(reader, key, pw_tree_scalar(reader->arena, key->fallback, nowhere), base);
}

static void take_key(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    const pw_tree *value = node ? pw_tree_find(node, key->name) : NULL;
    if (!value) {
        take_default(reader, key, node, base);
        if (node
            && (key->needed
                || (key->needed_with && holds(key->needed_with, key->map, node) == YES)))
            tell_missing(reader, key, node);
        return;
    }
    if (key->only_with && holds(key->only_with, key->map, node) == NO)
        tell_misplaced(reader, key, node);
    else if (key->take) key->take(reader, key, value, base);
}

void pw_take_map(pw_reader *reader, const char *map, const pw_tree *node, void *base)
{
    int choices = 0;
    for (int i = 0; i < pw_key_count; i++) {
        const pw_key *key = &pw_keys[i];
        if (strcmp(key->map, map)) continue;
        take_key(reader, key, node, base);
        if (key->choice > choices) choices = key->choice;
    }
    if (!node) return;
    for (int c = 1; c <= choices; c++) check_choice(reader, map, node, c);
    tell_unknowns(reader, map, node);
}
