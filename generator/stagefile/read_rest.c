/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Takers of single keys that are not like the others: name, target, transform, arithmetic,
 * limits, vectors. */
#include <ctype.h>
#include <stdio.h>
#include <string.h>

#include "stagefile/stage_name.h"
#include "stagefile/take.h"

/* ---- the name ---- */

void pw_take_stage_name(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    pw_stage *stage = base;
    char what[128], shown[PW_SHOWN_ROOM];
    pw_take_place(key, node, base, 0);
    if (node->kind != PW_TREE_SCALAR || pw_tree_is_empty(node)) {
        pw_take_refuse(reader, key, node, NULL);
        return;
    }
    const char *fault = pw_stage_name_fault(node->text);
    if (!fault) {
        stage->name = node->text;
        return;
    }
    snprintf(what, sizeof what, "%s %s", pw_shown(shown, node->text), fault);
    pw_take_refuse(reader, key, node, what);
}

void pw_take_target(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    pw_stage *stage = base;
    if (node->kind != PW_TREE_SCALAR || pw_tree_is_empty(node)) {
        pw_take_refuse(reader, key, node, NULL);
        return;
    }
    stage->target_given = node->at.line != 0;
    stage->target = node->text;
    pw_take_place(key, node, base, 0);
}

/* ---- transform, arithmetic ---- */

static bool is_word(const pw_tree *node)
{
    return node->kind == PW_TREE_SCALAR && isalpha((unsigned char)node->text[0])
        && strcasecmp(node->text, "nan") && strncasecmp(node->text, "inf", 3);
}

void pw_take_prewarp(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    pw_transform *transform = base;
    pw_take_place(key, node, base, 0);
    if (is_word(node)) {
        int index = pw_take_index(reader, key, node);
        if (index >= 0) transform->prewarp = index == 0 ? PW_PREWARP_NONE : PW_PREWARP_EACH_SECTION;
    } else if (pw_take_value(reader, key, node, &transform->prewarp_hz))
        transform->prewarp = PW_PREWARP_AT;
}

void pw_take_coefficient(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    pw_arithmetic *arithmetic = base;
    double bits;
    pw_take_place(key, node, base, 0);
    if (!pw_take_value(reader, key, node, &bits)) return;
    if (bits == 16 || bits == 32) arithmetic->coefficient_bits = (int)bits;
    else {
        char path[PW_KEY_ROOM], shown[PW_SHOWN_ROOM];
        pw_error(reader->messages, node->at,
                 "%s: %s is no word length here; expected 16 bits or 32 bits",
                 pw_key_path(path, key), pw_shown(shown, node->text));
    }
}

/* ---- limits, vectors ---- */

void pw_take_band(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    int before = reader->messages->errors;
    pw_take_pair(reader, key, node, base);
    ((pw_limits *)base)->band_given = reader->messages->errors == before;
}

void pw_take_forbidden(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    pw_take_place(key, node, base, 0);
    if (pw_take_index(reader, key, node) == 0) *(bool *)((char *)base + key->offset) = true;
}

void pw_take_signals(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    bool *want = (bool *)((char *)base + key->offset);
    if (!pw_take_is_list(reader, key, node)) return;
    const pw_key item = pw_key_item(key);
    for (int i = 0; i < node->count; i++) {
        int index = pw_take_index(reader, &item, node->item[i]);
        if (index >= 0 && want[index])
            pw_error(reader->messages, node->item[i]->at,
                     "vectors.signals: '%s' stands twice; expected it once",
                     key->words[index].word);
        if (index >= 0) want[index] = true;
    }
}
