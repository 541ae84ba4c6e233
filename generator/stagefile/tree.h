/* SPDX-License-Identifier: GPL-3.0-or-later */
/* YAML text as a tree in which everything knows where it stands. Knows nothing of stages. */
#ifndef PW_STAGEFILE_TREE_H
#define PW_STAGEFILE_TREE_H

#include <stdbool.h>
#include "base/arena.h"
#include "base/messages.h"

#define PW_TREE_MOST_BYTES (1 << 20)     /* of YAML text */
#define PW_TREE_MOST_LEVELS 16           /* of lists and maps inside each other */
#define PW_TREE_MOST_NODES 20000         /* aliases counted as what they stand for */

typedef enum pw_tree_kind { PW_TREE_SCALAR, PW_TREE_LIST, PW_TREE_MAP } pw_tree_kind;

typedef struct pw_tree {
    pw_tree_kind kind;
    pw_where at;
    const char *text;            /* scalar: UTF-8, no NUL inside, escapes resolved */
    bool quoted;                 /* scalar: in quotes or a block; else plain */
    struct pw_tree **item;       /* list: its items; map: its values */
    const char **key;            /* map: no two alike */
    pw_where *key_at;
    int count, room;
} pw_tree;

/* Reads one YAML document. every: {0, 0} for places from the text; otherwise the place that every
 * node gets. Memory is the arena's. Messages: text that is not UTF-8 or holds control characters,
 * YAML faults, too many bytes, levels or nodes, a second document, duplicate keys, keys that are
 * not text, merge keys, unknown aliases, application tags. PW_WRONG where there was any; *out is
 * null where no tree could be made, and holds what is sound otherwise. */
PW_CHECKED pw_status pw_tree_parse(const char *bytes, size_t size, pw_where every, pw_arena *arena,
                                   pw_tree **out, pw_messages *messages);

pw_tree *pw_tree_scalar(pw_arena *arena, const char *text, pw_where at);
pw_tree *pw_tree_map(pw_arena *arena, pw_where at);

/* The value of a key, or null. */
pw_tree *pw_tree_find(const pw_tree *map, const char *key);
/* Puts a value under a key, in place of an older one. */
void pw_tree_put(pw_arena *arena, pw_tree *map, const char *key, pw_where key_at, pw_tree *value);

/* True for a plain scalar of no text ("key:" and nothing after it). */
bool pw_tree_is_empty(const pw_tree *node);
/* "a list", "a map", "text", "no value". */
const char *pw_tree_phrase(const pw_tree *node);

/* Where text that is not plain UTF-8 first goes wrong (NUL and control characters count), and what
 * is wrong there in one phrase; null where all is well. */
const char *pw_utf8_fault(const char *bytes, size_t size, pw_where *at);

#endif
