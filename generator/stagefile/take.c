/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "stagefile/take.h"

#include <errno.h>
#include <limits.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/nearest.h"

#define LONGEST_TEXT 400

_Static_assert(sizeof(pw_method) == sizeof(int), "enumerations are stored as int");

static void *field(const pw_key *key, void *base) { return (char *)base + key->offset; }

void pw_take_place(const pw_key *key, const pw_tree *node, void *base, int index)
{
    if (key->at) ((pw_where *)((char *)base + key->at))[index] = node->at;
}

void pw_take_refuse(pw_reader *reader, const pw_key *key, const pw_tree *node, const char *what)
{
    char path[PW_KEY_ROOM];
    pw_text expected = {0};
    pw_key_expected(key, &expected);
    if (what)
        pw_error(reader->messages, node->at, "%s: %s; expected %s", pw_key_path(path, key), what,
                 pw_text_string(&expected));
    else
        pw_error(reader->messages, node->at, "%s %s %s; expected %s", pw_key_path(path, key),
                 pw_tree_is_empty(node) ? "has" : "is", pw_tree_phrase(node),
                 pw_text_string(&expected));
    pw_text_free(&expected);
}

/* A scalar with something in it; told otherwise. */
static bool is_scalar(pw_reader *reader, const pw_key *key, const pw_tree *node)
{
    if (node->kind == PW_TREE_SCALAR && !pw_tree_is_empty(node)) return true;
    pw_take_refuse(reader, key, node, NULL);
    return false;
}

/* ---- quantities ---- */

/* Behind a current source the input is in amperes. */
static pw_dimension dimension_of(const pw_reader *reader, const pw_key *key)
{
    const pw_analog_spec *first = &reader->stage->analog;
    if (key->dimension != PW_DIM_VOLTAGE || strcmp(key->map, "signal.input")) return key->dimension;
    while (first->kind == PW_ANALOG_CASCADE && first->members) first = &first->member[0];
    bool current = first->kind == PW_ANALOG_CIRCUIT && first->circuit.current_input;
    return current ? PW_DIM_CURRENT : PW_DIM_VOLTAGE;
}

static const char *range_fault(const pw_key *key, double value)
{
    if (key->range == PW_RANGE_POSITIVE && !(value > 0)) return "is not above 0";
    if (key->range == PW_RANGE_NOT_NEGATIVE && !(value >= 0)) return "is below 0";
    if (key->range == PW_RANGE_NOT_ZERO && value == 0) return "is 0";
    if (key->high > 0 && (key->forms & PW_FORM_COUNT) == 0 && value > key->high)
        return key->dimension == PW_DIM_FRACTION ? "is more than 90 %" : "is impossibly large";
    return NULL;
}

bool pw_take_value(pw_reader *reader, const pw_key *key, const pw_tree *node, double *value)
{
    pw_quantity_fault fault;
    char path[PW_KEY_ROOM], shown[PW_SHOWN_ROOM], what[96];
    if (!is_scalar(reader, key, node)) return false;
    if (!pw_quantity_read(node->text, dimension_of(reader, key), value, &fault)) {
        if (*fault.near)
            pw_error(reader->messages, node->at, "%s: %s; did you mean '%s'?",
                     pw_key_path(path, key), fault.what, fault.near);
        else pw_take_refuse(reader, key, node, fault.what);
        return false;
    }
    const char *out = range_fault(key, *value);
    if (!out) return true;
    snprintf(what, sizeof what, "%s %s", pw_shown(shown, node->text), out);
    pw_take_refuse(reader, key, node, what);
    return false;
}

void pw_take_quantity(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    double value;
    pw_take_place(key, node, base, 0);
    if (pw_take_value(reader, key, node, &value)) *(double *)field(key, base) = value;
}

void pw_take_given(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    double value;
    if (pw_take_value(reader, key, node, &value))
        *(pw_given *)field(key, base) = (pw_given){value, true, node->at};
}

bool pw_take_is_list(pw_reader *reader, const pw_key *key, const pw_tree *node)
{
    char what[64];
    if (node->kind != PW_TREE_LIST) {
        pw_take_refuse(reader, key, node, NULL);
        return false;
    }
    if (node->count >= key->least && node->count <= key->most) return true;
    if (!node->count) snprintf(what, sizeof what, "the list is empty");
    else if (key->least == key->most)
        snprintf(what, sizeof what, "%d item%s, not %d", node->count, node->count == 1 ? "" : "s",
                 key->least);
    else snprintf(what, sizeof what, "%d items, more than %d", node->count, key->most);
    pw_take_refuse(reader, key, node, what);
    return false;
}

void pw_take_pair(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    double value[2];
    if (!pw_take_is_list(reader, key, node)) return;
    const pw_key item = pw_key_item(key);
    bool first = pw_take_value(reader, &item, node->item[0], &value[0]);
    bool second = pw_take_value(reader, &item, node->item[1], &value[1]);
    for (int i = 0; i < 2; i++) pw_take_place(key, node->item[i], base, i);
    if (!first || !second) return;
    if (value[0] >= value[1]) {
        pw_take_refuse(reader, key, node->item[1], "the second is not above the first");
        return;
    }
    memcpy(field(key, base), value, sizeof value);
}

/* ---- counts ---- */

static bool take_whole(pw_reader *reader, const pw_key *key, const pw_tree *node, uint64_t *out)
{
    char what[96], shown[PW_SHOWN_ROOM];
    if (!is_scalar(reader, key, node)) return false;
    const char *p = pw_skip_blanks(node->text), *digits = p + (*p == '+');
    size_t n = strspn(digits, "0123456789");
    const char *tail = pw_skip_blanks(digits + n);
    bool bits = (key->forms & PW_FORM_QUANTITY) && (!strcmp(tail, "bits") || !strcmp(tail, "bit"));
    errno = 0;
    unsigned long long value = strtoull(digits, NULL, 10);
    bool fits = n && !errno && (key->high >= 18446744073709551615.0 || (double)value <= key->high);
    if (n && (!*tail || bits) && fits && (double)value >= key->low) {
        *out = value;
        return true;
    }
    snprintf(what, sizeof what, n && !*tail ? "%s is out of range" : "%s is not a whole number",
             pw_shown(shown, node->text));
    pw_take_refuse(reader, key, node, what);
    return false;
}

void pw_take_count(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    uint64_t value;
    pw_take_place(key, node, base, 0);
    if (take_whole(reader, key, node, &value)) *(int *)field(key, base) = (int)value;
}

void pw_take_seed(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    uint64_t value;
    if (take_whole(reader, key, node, &value)) *(uint64_t *)field(key, base) = value;
}

/* ---- words ---- */

int pw_take_index(pw_reader *reader, const pw_key *key, const pw_tree *node)
{
    const char *known[32];
    char path[PW_KEY_ROOM], shown[PW_SHOWN_ROOM], what[96];
    int n = 0;
    if (!is_scalar(reader, key, node)) return -1;
    for (; key->words[n].word; n++) {
        if (!strcmp(node->text, key->words[n].word)) return n;
        known[n] = key->words[n].word;
    }
    pw_shown(shown, node->text);
    if (pw_key_later(key->map, key->name, node->text)) {
        snprintf(what, sizeof what, "%s does not work yet", shown);
        pw_take_refuse(reader, key, node, what);
        return -1;
    }
    const char *near = pw_nearest(node->text, known, n);
    if (near)
        pw_error(reader->messages, node->at, "%s: unknown word %s; did you mean '%s'?",
                 pw_key_path(path, key), shown, near);
    else {
        snprintf(what, sizeof what, "unknown word %s", shown);
        pw_take_refuse(reader, key, node, what);
    }
    return -1;
}

void pw_take_word(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    int index = pw_take_index(reader, key, node);
    pw_take_place(key, node, base, 0);
    if (index >= 0) memcpy(field(key, base), &index, sizeof index);
}

void pw_take_word_text(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    int index = pw_take_index(reader, key, node);
    if (index >= 0) *(const char **)field(key, base) = key->words[index].word;
}

void pw_take_word_flag(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    int index = pw_take_index(reader, key, node);
    pw_take_place(key, node, base, 0);
    if (index >= 0) *(bool *)field(key, base) = index == 1;
}

void pw_take_flag(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    pw_take_word_flag(reader, key, node, base);
}

/* ---- text ---- */

void pw_take_text(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    if (node->kind != PW_TREE_SCALAR) {
        pw_take_refuse(reader, key, node, NULL);
        return;
    }
    if (strlen(node->text) > LONGEST_TEXT) {
        pw_take_refuse(reader, key, node, "the text is longer than 400 bytes");
        return;
    }
    char *line = pw_arena_copy(reader->arena, node->text), *to = line;
    for (const char *p = line; *p; p++) {
        bool blank = *p == ' ' || *p == '\t' || *p == '\n' || *p == '\r';
        if (!blank) *to++ = *p;
        else if (to > line && to[-1] != ' ') *to++ = ' ';
    }
    if (to > line && to[-1] == ' ') to--;
    *to = 0;
    *(const char **)field(key, base) = line;
    pw_take_place(key, node, base, 0);
}

void pw_take_submap(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    if (node && node->kind != PW_TREE_MAP) {
        pw_take_refuse(reader, key, node, NULL);
        node = NULL;
    }
    if (node) pw_take_place(key, node, base, 0);
    pw_take_map(reader, key->sub, node, field(key, base));
}
