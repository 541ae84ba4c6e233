/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdio.h>
#include <string.h>

#include "stagefile/keys.h"

const pw_key *pw_key_find(const char *map, const char *name)
{
    for (int i = 0; i < pw_key_count; i++)
        if (!strcmp(pw_keys[i].map, map) && !strcmp(pw_keys[i].name, name)) return &pw_keys[i];
    return NULL;
}

bool pw_key_later(const char *map, const char *name, const char *word)
{
    static const struct { const char *map, *name, *word; } later[] = {
        {"", "loop", NULL}, {"transform", "method", "fitted"},
    };
    for (size_t i = 0; i < sizeof later / sizeof later[0]; i++)
        if (!strcmp(later[i].map, map) && !strcmp(later[i].name, name) && !later[i].word == !word
            && (!word || !strcmp(later[i].word, word)))
            return true;
    return false;
}

char *pw_key_path(char *buffer, const pw_key *key)
{
    snprintf(buffer, PW_KEY_ROOM, "%s%s%s", key->map, *key->map ? "." : "", key->name);
    return buffer;
}

static void add_words(const pw_word *words, pw_text *out)
{
    bool one = !words[1].word;
    pw_text_add(out, one ? "the word " : "one of ");
    for (int i = 0; words[i].word; i++) pw_text_print(out, "%s%s", i ? ", " : "", words[i].word);
}

static void add_or(pw_text *out, size_t start)
{
    if (out->size > start) pw_text_add(out, ", or ");
}

static void add_sample(pw_text *out, size_t start, const char *phrase, const char *sample)
{
    add_or(out, start);
    pw_text_add(out, phrase);
    if (sample) pw_text_print(out, " such as %s", sample);
}

static void add_count(const pw_key *key, pw_text *out, size_t start)
{
    add_or(out, start);
    pw_text_print(out, "a whole number%s from %.0f to ",
                  key->forms & PW_FORM_QUANTITY ? " of bits" : "", key->low);
    if (key->high < 1e15) pw_text_print(out, "%.0f", key->high);
    else pw_text_add(out, "2^64 - 1");
}

void pw_key_expected(const pw_key *key, pw_text *out)
{
    size_t start = out->size;
    bool several = key->forms & (PW_FORM_LIST | PW_FORM_PAIR_TEXT);
    const char *sample = several ? key->item_example : key->example;
    if (key->forms & PW_FORM_PAIR_TEXT) {
        add_sample(out, start, "a root", sample);
        return;
    }
    if (key->forms & PW_FORM_WORD) add_words(key->words, out);
    if (key->forms & PW_FORM_FLAG) pw_text_add(out, "true or false");
    if (key->forms & PW_FORM_COUNT) add_count(key, out, start);
    else if (key->forms & PW_FORM_QUANTITY)
        add_sample(out, start, pw_dimension_phrase(key->dimension),
                   sample ? sample : pw_dimension_sample(key->dimension));
    if (key->forms & PW_FORM_TEXT) add_sample(out, start, key->text ? key->text : "a text", sample);
    if (key->forms & PW_FORM_LIST) add_sample(out, start, "a list", key->example);
    if (key->forms & (PW_FORM_MAP | PW_FORM_NAMED)) add_sample(out, start, "a map", key->example);
}

pw_key pw_key_item(const pw_key *list)
{
    pw_key item = *list;
    item.forms = list->item_forms;
    item.example = list->item_example;
    return item;
}
