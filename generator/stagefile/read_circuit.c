/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Circuits and cells, as far as their words and quantities go; analog/ judges the rest. */
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "base/nearest.h"
#include "stagefile/take.h"

/* ---- nodes ---- */

/* One word, not too long to print. */
static bool is_name(const char *text)
{
    return *text && !strpbrk(text, " \t\r\n") && strlen(text) < 64;
}

static const char *read_name(pw_reader *reader, const pw_key *key, const pw_tree *node)
{
    if (node->kind != PW_TREE_SCALAR || pw_tree_is_empty(node)) {
        pw_take_refuse(reader, key, node, NULL);
        return NULL;
    }
    if (is_name(node->text)) return node->text;
    char what[96], shown[PW_SHOWN_ROOM];
    snprintf(what, sizeof what, "%s is no name (one word, up to 63 bytes)",
             pw_shown(shown, node->text));
    pw_take_refuse(reader, key, node, what);
    return NULL;
}

void pw_take_node(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    const char *name = read_name(reader, key, node);
    pw_take_place(key, node, base, 0);
    if (name) *(const char **)((char *)base + key->offset) = name;
}

void pw_take_nodes(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    if (!pw_take_is_list(reader, key, node)) return;
    const pw_key item = pw_key_item(key);
    for (int i = 0; i < 2; i++) {
        const char *name = read_name(reader, &item, node->item[i]);
        pw_take_place(key, node->item[i], base, i);
        if (name) ((const char **)((char *)base + key->offset))[i] = name;
    }
}

void pw_take_current_node(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    ((pw_circuit *)base)->current_input = true;
    pw_take_node(reader, key, node, base);
}

void pw_take_output(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    if (node->kind == PW_TREE_LIST) pw_take_nodes(reader, key, node, base);
    else pw_take_node(reader, key, node, base);
}

/* ---- parts ---- */

static pw_part_kind kind_of(const char *word)
{
    static const char *const kinds[] = {
        [PW_RESISTOR] = "resistor",   [PW_CAPACITOR] = "capacitor",
        [PW_INDUCTOR] = "inductor",   [PW_OP_AMP] = "op-amp",
        [PW_AMPLIFIER] = "amplifier", [PW_TRANSCONDUCTOR] = "transconductor",
        [PW_COUPLING] = "coupling",
    };
    int kind = 0;
    while (strcmp(kinds[kind], word)) kind++;
    return (pw_part_kind)kind;
}

void pw_take_part_value(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    pw_part *part = base;
    part->kind = kind_of(key->name);
    pw_take_quantity(reader, key, node, base);
    if (part->kind == PW_COUPLING && fabs(part->value) >= 1)
        pw_take_refuse(reader, key, node, "the coupling is not below 1");
}

void pw_take_op_amp(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    pw_part *part = base;
    part->kind = PW_OP_AMP;
    part->ideal = node->kind != PW_TREE_MAP;
    pw_take_place(key, node, base, 0);
    if (part->ideal) (void)pw_take_index(reader, key, node);
    else pw_take_map(reader, key->sub, node, part);
}

void pw_take_parts(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    pw_circuit *circuit = base;
    if (node->kind != PW_TREE_MAP || !node->count) {
        pw_take_refuse(reader, key, node, node->kind == PW_TREE_MAP ? "there are no parts" : NULL);
        return;
    }
    circuit->part = pw_arena_take(reader->arena, (size_t)node->count * sizeof *circuit->part);
    circuit->parts = node->count;
    for (int i = 0; i < node->count; i++) {
        pw_part *part = &circuit->part[i];
        part->name = node->key[i];
        part->at = node->key_at[i];
        if (!is_name(part->name))
            pw_error(reader->messages, part->at,
                     "a part's name is one word of up to 63 bytes; expected one "
                     "such as R1");
        else if (node->item[i]->kind == PW_TREE_MAP)
            pw_take_map(reader, key->sub, node->item[i], part);
        else
            pw_error(reader->messages, node->item[i]->at,
                     "the part %.40s %s %s; expected a map such as "
                     "{resistor: 22k, between: [in, out]}",
                     part->name, pw_tree_is_empty(node->item[i]) ? "has" : "is",
                     pw_tree_phrase(node->item[i]));
    }
}

void pw_take_circuit(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    pw_analog_spec *spec = base;
    spec->kind = PW_ANALOG_CIRCUIT;
    spec->circuit.at = node->at;
    if (node->kind != PW_TREE_MAP) {
        pw_take_refuse(reader, key, node, NULL);
        return;
    }
    pw_take_map(reader, key->sub, node, &spec->circuit);
    if (spec->circuit.current_input && spec->circuit.source_resistance == 0)
        spec->circuit.source_resistance = INFINITY;
}

/* ---- cells ---- */

void pw_take_kind(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    pw_take_node(reader, key, node, base);
}

/* R1 is a resistance, C2 a capacitance, L1 an inductance; other names are plain numbers. */
static pw_dimension dimension_of_name(const char *name)
{
    bool numbered = name[0] && name[1] && strspn(name + 1, "0123456789") == strlen(name + 1);
    if (!numbered) return PW_DIM_NUMBER;
    return name[0] == 'R' ? PW_DIM_RESISTANCE : name[0] == 'C' ? PW_DIM_CAPACITANCE
         : name[0] == 'L' ? PW_DIM_INDUCTANCE : PW_DIM_NUMBER;
}

/* The table's row for the value, made that of a part of this name. */
static pw_key value_key(const char *name)
{
    static const char *const rows[] = {"resistor", "capacitor", "inductor"};
    pw_dimension dimension = dimension_of_name(name);
    pw_key key = dimension == PW_DIM_NUMBER ? *pw_key_find("cell-value", "value")
               : *pw_key_find("part", rows[dimension - PW_DIM_RESISTANCE]);
    key.map = "cell";
    key.name = name;
    key.dimension = dimension;
    return key;
}

/* A name that is a mistyped key of the table rather than a part. */
static bool is_mistyped_kind(pw_reader *reader, const pw_tree *cell, int index)
{
    static const char *const kind = "kind";
    if (pw_tree_find(cell, kind) || !pw_nearest(cell->key[index], &kind, 1)) return false;
    char shown[PW_SHOWN_ROOM];
    pw_error(reader->messages, cell->key_at[index], "unknown key %s in cell; did you mean 'kind'?",
             pw_shown(shown, cell->key[index]));
    return true;
}

static void read_cell_value(pw_reader *reader, const char *name, const pw_tree *node,
                            pw_cell_value *out)
{
    pw_cell_form form = {0};
    pw_key key = value_key(name);
    const pw_tree *value = node;
    if (node->kind == PW_TREE_MAP) {
        pw_take_map(reader, "cell-value", node, &form);
        value = pw_tree_find(node, "value");
        if (!value) return;
    }
    if (!pw_take_value(reader, &key, value, &form.value)) return;
    *out = (pw_cell_value){name, form.value, form.tolerance, form.normal, value->at};
}

void pw_take_cell(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    pw_analog_spec *spec = base;
    pw_cell *cell = &spec->cell;
    spec->kind = PW_ANALOG_CELL;
    cell->at = node->at;
    if (node->kind != PW_TREE_MAP) {
        pw_take_refuse(reader, key, node, NULL);
        return;
    }
    pw_take_map(reader, key->sub, node, cell);
    cell->value = pw_arena_take(reader->arena, (size_t)node->count * sizeof *cell->value);
    for (int i = 0; i < node->count; i++)
        if (strcmp(node->key[i], "kind") && !is_mistyped_kind(reader, node, i))
            read_cell_value(reader, node->key[i], node->item[i], &cell->value[cell->values++]);
}
