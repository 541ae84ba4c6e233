/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "stagefile/schema.h"

#include <jansson.h>
#include <stdlib.h>
#include <string.h>

#include "stagefile/keys.h"
#include "stagefile/stage_name.h"
#include "stagefile/units.h"

#define BLANKS "\\s*"

/* ---- values ---- */

/* A scalar as an editor's YAML reader takes it: a number, a flag, or text. */
static json_t *json_of_scalar(const char *text)
{
    char *end;
    if (!strcmp(text, "true") || !strcmp(text, "false")) return json_boolean(text[0] == 't');
    long long whole = strtoll(text, &end, 10);
    if (*text && !*end) return json_integer(whole);
    double value = strtod(text, &end);
    return *text && !*end ? json_real(value) : json_string(text);
}

static json_t *json_of(const pw_tree *node)
{
    if (node->kind == PW_TREE_SCALAR) return json_of_scalar(node->text);
    json_t *made = node->kind == PW_TREE_LIST ? json_array() : json_object();
    for (int i = 0; i < node->count; i++) {
        if (node->kind == PW_TREE_LIST) json_array_append_new(made, json_of(node->item[i]));
        else json_object_set_new(made, node->key[i], json_of(node->item[i]));
    }
    return made;
}

/* YAML of the table as JSON. */
static json_t *json_of_yaml(const char *yaml)
{
    pw_arena arena = {0};
    pw_messages messages = {.file = "table"};
    pw_tree *tree;
    json_t *made = NULL;
    if (!pw_tree_parse(yaml, strlen(yaml), (pw_where){0}, &arena, &tree, &messages) && tree)
        made = json_of(tree);
    pw_messages_free(&messages);
    pw_arena_free(&arena);
    return made ? made : json_string(yaml);
}

/* ---- one form ---- */

static json_t *pattern(const char *text)
{
    return json_pack("{s:s, s:s}", "type", "string", "pattern", text);
}

static void add_bounds(json_t *number, const pw_key *key)
{
    if (key->range == PW_RANGE_POSITIVE)
        json_object_set_new(number, "exclusiveMinimum", json_integer(0));
    if (key->range == PW_RANGE_NOT_NEGATIVE)
        json_object_set_new(number, "minimum", json_integer(0));
    if (key->range == PW_RANGE_NOT_ZERO)
        json_object_set_new(number, "not", json_pack("{s:i}", "const", 0));
    if (key->high > 0) json_object_set_new(number, "maximum", json_real(key->high));
}

static void add_quantity(json_t *any, const pw_key *key)
{
    pw_text text = {0};
    bool decibels = key->dimension == PW_DIM_RATIO;   /* 0 dB is 1, and so on */
    bool signless = !decibels
                    && (key->range == PW_RANGE_POSITIVE || key->range == PW_RANGE_NOT_NEGATIVE);
    bool nonzero = key->range == PW_RANGE_POSITIVE || key->range == PW_RANGE_NOT_ZERO;
    json_t *number = json_pack("{s:s}", "type", "number");
    add_bounds(number, key);
    json_array_append_new(any, number);
    pw_dimension_pattern(key->dimension, !signless, !nonzero, &text);
    json_array_append_new(any, pattern(pw_text_string(&text)));
    pw_text_free(&text);
}

static void add_count(json_t *any, const pw_key *key)
{
    json_t *number = json_pack("{s:s, s:I}", "type", "integer", "minimum", (json_int_t)key->low);
    json_object_set_new(number, "maximum", key->high < 9e15 ? json_integer((json_int_t)key->high)
                                                            : json_real(key->high));
    json_array_append_new(any, number);
    pw_text text = {0};
    pw_text_print(&text, "^" BLANKS "\\+?%s[0-9]*" BLANKS "%s$",
                  key->low >= 1 ? "0*[1-9]" : "[0-9]",
                  key->forms & PW_FORM_QUANTITY ? "(?:bits?)?" : "");
    json_array_append_new(any, pattern(pw_text_string(&text)));
    pw_text_free(&text);
}

static void add_words(json_t *any, const pw_word *words)
{
    json_t *list = json_array();
    for (int i = 0; words[i].word; i++) json_array_append_new(list, json_string(words[i].word));
    json_array_append_new(any, json_pack("{s:o}", "enum", list));
}

static void add_flag(json_t *any)
{
    json_array_append_new(any, json_pack("{s:s}", "type", "boolean"));
    add_words(any, pw_flag_words);
}

static json_t *reference(const char *map)
{
    return json_pack("{s:s+}", "$ref", "#/$defs/", map);
}

/* Unquoted names may look like numbers or flags to an editor. */
static void add_text(json_t *any, const pw_key *key)
{
    if (!strcmp(key->map, "") && !strcmp(key->name, "stage")) {
        json_t *list = json_array();
        for (int i = 0; pw_stage_name_words[i]; i++)
            json_array_append_new(list, json_string(pw_stage_name_words[i]));
        json_array_append_new(any, json_pack("{s:s, s:s, s:{s:o}}", "type", "string", "pattern",
                                             pw_stage_name_pattern, "not", "enum", list));
    } else if (!strcmp(key->map, "") && !strcmp(key->name, "about"))
        json_array_append_new(
            any, json_pack("{s:[s,s,s,s]}", "type", "string", "number", "boolean", "null"));
    else
        json_array_append_new(any, json_pack("{s:[s,s,s]}", "type", "string", "number", "boolean"));
}

static void add_pair_text(json_t *any)
{
    json_array_append_new(any, pattern("^[^\u00b1]*(?:\u00b1|\\+-|\\+/-).*[ij]"));
}

static json_t *forms(const pw_key *key, unsigned which);

static void add_list(json_t *any, const pw_key *key)
{
    json_t *list = json_pack("{s:s, s:o}", "type", "array", "items", forms(key, key->item_forms));
    if (key->least) json_object_set_new(list, "minItems", json_integer(key->least));
    if (key->most) json_object_set_new(list, "maxItems", json_integer(key->most));
    if (key->item_forms == PW_FORM_WORD) json_object_set_new(list, "uniqueItems", json_true());
    json_array_append_new(any, list);
}

/* Any of the forms; where there is but one, that one itself. */
static json_t *forms(const pw_key *key, unsigned which)
{
    json_t *any = json_array();
    if (which & PW_FORM_FLAG) add_flag(any);
    else if (which & PW_FORM_WORD) add_words(any, key->words);
    if (which & PW_FORM_COUNT) add_count(any, key);
    else if (which & PW_FORM_QUANTITY) add_quantity(any, key);
    if (which & PW_FORM_TEXT) add_text(any, key);
    if (which & PW_FORM_PAIR_TEXT) add_pair_text(any);
    if (which & PW_FORM_LIST) add_list(any, key);
    if (which & PW_FORM_MAP) json_array_append_new(any, reference(key->sub));
    if (which & PW_FORM_NAMED)
        json_array_append_new(any, json_pack("{s:s, s:i, s:o}", "type", "object", "minProperties",
                                             1, "additionalProperties", reference(key->sub)));
    if (json_array_size(any) != 1) return json_pack("{s:o}", "anyOf", any);
    json_t *one = json_incref(json_array_get(any, 0));
    json_decref(any);
    return one;
}

/* ---- a key ---- */

static json_t *property(const pw_key *key)
{
    json_t *made = json_pack("{s:s}", "description", key->help), *form = forms(key, key->forms);
    json_object_update(made, form);
    json_decref(form);
    if (key->fallback && *key->fallback)
        json_object_set_new(made, "default", json_of_yaml(key->fallback));
    if (key->otherwise) {
        pw_text text = {0};
        pw_text_print(&text, "%s (default: %s)", key->help, key->otherwise);
        json_object_set_new(made, "description", json_string(pw_text_string(&text)));
        pw_text_free(&text);
    }
    if (key->example)
        json_object_set_new(made, "examples", json_pack("[o]", json_of_yaml(key->example)));
    return made;
}

/* ---- a map ---- */

/* The parts of "a|b" as an array of strings. */
static json_t *split(const char *list)
{
    json_t *made = json_array();
    for (const char *p = list; *p;) {
        size_t n = strcspn(p, "|");
        json_array_append_new(made, json_stringn(p, n));
        p += n + (p[n] == '|');
    }
    return made;
}

/* A schema that holds where the condition does; loose: also where the key it asks for is missing. */
static json_t *condition(const char *text, bool loose)
{
    const char *equals = strchr(text, '=');
    if (!equals) {
        json_t *any = json_array(), *names = split(text), *name;
        size_t i;
        json_array_foreach(names, i, name)
            json_array_append_new(any, json_pack("{s:[O]}", "required", name));
        json_decref(names);
        return json_pack("{s:o}", "anyOf", any);
    }
    json_t *name = json_stringn(text, (size_t)(equals - text)), *of = json_object();
    json_object_set_new(of, json_string_value(name), json_pack("{s:o}", "enum", split(equals + 1)));
    json_t *made = json_pack("{s:o}", "properties", of);
    if (!loose) json_object_set_new(made, "required", json_pack("[O]", name));
    json_decref(name);
    return made;
}

static json_t *one_of(const char *map, int choice)
{
    json_t *list = json_array();
    for (int i = 0; i < pw_key_count; i++)
        if (!strcmp(pw_keys[i].map, map) && pw_keys[i].choice == choice)
            json_array_append_new(list, json_pack("{s:[s]}", "required", pw_keys[i].name));
    return json_pack("{s:o}", "oneOf", list);
}

/* What the keys of a map have to do with each other. */
static json_t *bonds(const char *map)
{
    json_t *all = json_array();
    int told = 0;
    for (int i = 0; i < pw_key_count; i++) {
        const pw_key *key = &pw_keys[i];
        if (strcmp(key->map, map)) continue;
        if (key->only_with)
            json_array_append_new(all, json_pack("{s:{s:o}}", "dependentSchemas", key->name,
                                                 condition(key->only_with, true)));
        if (key->needed_with)
            json_array_append_new(all, json_pack("{s:o, s:{s:[s]}}", "if",
                                                 condition(key->needed_with, false), "then",
                                                 "required", key->name));
        if (key->choice <= told) continue;
        told = key->choice;
        json_array_append_new(all, key->only_with ? json_pack("{s:o, s:o}", "if",
                                                              condition(key->only_with, false),
                                                              "then", one_of(map, told))
                                                  : one_of(map, told));
    }
    return all;
}

static json_t *map_schema(const pw_key_map *map);

/* The map form of a cell's value, its quantity that of a part of this kind. */
static json_t *cell_value_of(const char *kind)
{
    const pw_key_map *map = pw_key_maps;
    while (strcmp(map->map, "cell-value")) map++;
    json_t *made = map_schema(map), *any = json_array();
    json_t *value = json_object_get(json_object_get(made, "properties"), "value");
    add_quantity(any, pw_key_find("part", kind));
    json_object_set_new(value, "anyOf", any);
    return made;
}

/* Part values of a cell by the first letter of their names. */
static void add_free_names(json_t *made)
{
    static const char *const rows[][2] = {
        {"^R[0-9]+$", "resistor"}, {"^C[0-9]+$", "capacitor"}, {"^L[0-9]+$", "inductor"},
    };
    json_t *patterns = json_object();
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        json_t *any = json_array();
        add_quantity(any, pw_key_find("part", rows[i][1]));
        json_array_append_new(any, cell_value_of(rows[i][1]));
        json_object_set_new(patterns, rows[i][0], json_pack("{s:o}", "anyOf", any));
    }
    json_t *any = json_array();
    add_quantity(any, pw_key_find("cell-value", "value"));
    json_array_append_new(any, reference("cell-value"));
    json_object_set_new(made, "patternProperties", patterns);
    json_object_set_new(made, "additionalProperties", json_pack("{s:o}", "anyOf", any));
}

static json_t *map_schema(const pw_key_map *map)
{
    json_t *properties = json_object(), *required = json_array(), *all = bonds(map->map);
    for (int i = 0; i < pw_key_count; i++) {
        if (strcmp(pw_keys[i].map, map->map)) continue;
        json_object_set_new(properties, pw_keys[i].name, property(&pw_keys[i]));
        if (pw_keys[i].needed) json_array_append_new(required, json_string(pw_keys[i].name));
    }
    json_t *made = json_pack("{s:s, s:s, s:o}", "type", "object", "description", map->help,
                             "properties", properties);
    if (map->free_names) add_free_names(made);
    else json_object_set_new(made, "additionalProperties", json_false());
    if (json_array_size(required)) json_object_set(made, "required", required);
    if (json_array_size(all)) json_object_set(made, "allOf", all);
    json_decref(required);
    json_decref(all);
    return made;
}

void pw_schema_write(pw_text *out)
{
    json_t *schema = json_pack("{s:s, s:s}", "$schema",
                               "https://json-schema.org/draft/2020-12/schema", "title",
                               "polewright stage file");
    json_t *definitions = json_object();
    for (int i = 0; i < pw_key_map_count; i++) {
        json_t *made = map_schema(&pw_key_maps[i]);
        if (*pw_key_maps[i].map) json_object_set(definitions, pw_key_maps[i].map, made);
        else json_object_update(schema, made);
        json_decref(made);
    }
    json_object_set_new(schema, "$defs", definitions);
    char *text = json_dumps(schema, JSON_INDENT(2));
    pw_text_add(out, text ? text : "");
    pw_text_add(out, "\n");
    free(text);
    json_decref(schema);
}
