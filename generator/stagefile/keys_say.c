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

static void add_sample(const pw_key *key, const char *phrase, pw_text *out)
{
    pw_text_add(out, phrase);
    if (key->example) pw_text_print(out, " such as %s", key->example);
}

void pw_key_expected(const pw_key *key, pw_text *out)
{
    size_t start = out->size;
    if (key->forms & PW_FORM_WORD) add_words(key->words, out);
    if (key->forms & PW_FORM_FLAG) pw_text_add(out, "true or false");
    if (key->forms & PW_FORM_QUANTITY) {
        add_or(out, start);
        add_sample(key, pw_dimension_phrase(key->dimension), out);
    } else if (key->forms & PW_FORM_COUNT) {
        add_or(out, start);
        if (key->high < 1e15) pw_text_print(out, "a whole number from %.0f to %.0f", key->low, key->high);
        else pw_text_print(out, "a whole number from %.0f to 2^64 - 1", key->low);
    }
    if (key->forms & PW_FORM_TEXT) {
        add_or(out, start);
        add_sample(key, "a name or a text", out);
    }
    if (key->forms & PW_FORM_LIST) {
        add_or(out, start);
        add_sample(key, key->forms & PW_FORM_TEXT ? "a list of two" : "a list", out);
    }
    if (key->forms & (PW_FORM_MAP | PW_FORM_NAMED)) {
        add_or(out, start);
        add_sample(key, "a map", out);
    }
}
