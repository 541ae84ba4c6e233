/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "stagefile/override.h"

#include <stdlib.h>
#include <string.h>

/* Where the value of one component stands in its parent; null, told, where it cannot stand. */
static pw_tree **slot(pw_arena *arena, pw_tree *parent, const char *name, bool last, pw_where at,
                      pw_messages *messages)
{
    if (parent->kind == PW_TREE_MAP) {
        if (!pw_tree_find(parent, name))
            pw_tree_put(arena, parent, name, at, pw_tree_map(arena, at));
        for (int i = 0; i < parent->count; i++)
            if (!strcmp(parent->key[i], name)) {
                if (last) parent->key_at[i] = at;
                return &parent->item[i];
            }
    }
    if (parent->kind == PW_TREE_LIST) {
        char *end;
        long n = strtol(name, &end, 10);
        if (*name && !*end && n >= 1 && n <= parent->count) return &parent->item[n - 1];
        pw_error(messages, at, "'%s' is no item of this list; expected a number from 1 to %d", name,
                 parent->count);
        return NULL;
    }
    pw_error(messages, at, "what stands before '.%s' is not a map; expected the path of a key",
             name);
    return NULL;
}

/* One component after the other; the last one's slot, or null where the path does not exist. */
static pw_tree **walk(pw_arena *arena, pw_tree *root, char *path, pw_where at,
                      pw_messages *messages)
{
    pw_tree **here = NULL;
    for (char *name = path, *dot; name; name = dot) {
        dot = strchr(name, '.');
        if (dot) *dot++ = 0;
        if (!*name) {
            pw_error(messages, at, "an empty name in the path; expected PATH=VALUE such as "
                     "transform.method=matched-z");
            return NULL;
        }
        here = slot(arena, here ? *here : root, name, !dot, at, messages);
        if (!here) return NULL;
        if (dot && pw_tree_is_empty(*here)) *here = pw_tree_map(arena, at);
    }
    return here;
}

void pw_override(const char *set, pw_where at, pw_arena *arena, pw_tree *root,
                 pw_messages *messages)
{
    const char *equals = strchr(set, '=');
    pw_tree *value;
    if (!equals || equals == set) {
        pw_error(messages, at, "no value; expected PATH=VALUE such as transform.method=matched-z");
        return;
    }
    if (pw_tree_parse(equals + 1, strlen(equals + 1), at, arena, &value, messages)) return;
    if (!value) value = pw_tree_scalar(arena, "", at);
    char *path = pw_arena_print(arena, "%.*s", (int)(equals - set), set);
    pw_tree **place = walk(arena, root, path, at, messages);
    if (!place) return;
    *place = value;
}
