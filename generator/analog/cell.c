/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analog/cell.h"

#include <ctype.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "analog/model.h"
#include "base/nearest.h"

#define MOST_PARTS 140
#define MOST_STAGES 60

/* One part of a net. */
typedef struct place {
    const char *name, *node[3];
    int nodes;
    char otherwise;              /* 's' a wire, 'o' nothing, 0: must be given */
} place;

typedef struct net { place part[MOST_PARTS]; int parts; } net;

typedef struct expander {
    const pw_cell *cell;
    const pw_cell_kind *kind;
    pw_arena *arena;
    pw_messages *messages;
    net net;
    int stages;                  /* of an rc-ladder: 0 where not given */
} expander;

/* ---- The table ---- */

const pw_cell_kind *pw_cell_row(int i)
{
    if (i < pw_cells_passive_count) return &pw_cells_passive[i];
    i -= pw_cells_passive_count;
    if (i < pw_cells_amplifier_count) return &pw_cells_amplifier[i];
    i -= pw_cells_amplifier_count;
    return i < pw_cells_filter_count ? &pw_cells_filter[i] : NULL;
}

const pw_cell_kind *pw_cell_find(const char *name)
{
    for (int i = 0; pw_cell_row(i); i++)
        if (!strcmp(pw_cell_row(i)->name, name)) return pw_cell_row(i);
    return NULL;
}

/* ---- The net language ---- */

static void parse_part(char *text, net *out)
{
    place *p = &out->part[out->parts++];
    char *save, *word = strtok_r(text, " ", &save);
    char *mark = strchr(word, '?');
    *p = (place){.name = word, .otherwise = mark ? mark[1] : 0};
    if (mark) *mark = 0;
    while ((word = strtok_r(NULL, " ", &save))) p->node[p->nodes++] = word;
}

static void parse(const char *text, pw_arena *arena, net *out)
{
    char *save, *copy = pw_arena_copy(arena, text);
    out->parts = 0;
    for (char *part = strtok_r(copy, ";", &save); part; part = strtok_r(NULL, ";", &save))
        parse_part(part, out);
}

/* ---- Ladders ---- */

/* The largest number after the letter among the cell's values. */
static int highest(const pw_cell *cell, char letter)
{
    int most = 0;
    for (int i = 0; i < cell->values; i++)
        if (cell->value[i].name[0] == letter && isdigit((unsigned char)cell->value[i].name[1])) {
            int n = atoi(cell->value[i].name + 1);
            if (n > most && n <= MOST_STAGES) most = n;
        }
    return most;
}

static void rc_ladder(int stages, pw_text *out)
{
    for (int i = 1; i <= stages; i++) {
        const char *before = i == 1 ? "in" : "n", *after = i == stages ? "out" : "n";
        pw_text_print(out, "%sR%d %s", i > 1 ? "; " : "", i, before);
        if (i > 1) pw_text_print(out, "%d", i - 1);
        pw_text_print(out, " %s", after);
        if (i < stages) pw_text_print(out, "%d", i);
        pw_text_print(out, "; C%d %s", i, after);
        if (i < stages) pw_text_print(out, "%d", i);
        pw_text_add(out, " ground");
    }
}

/* Arms in turn, shunt and series, from node n0 behind R1; the last node is the output. */
static void rlc_ladder(char shunt, char series, bool shunt_first, int shunts, int serieses,
                       pw_text *out)
{
    int node = 0, shunt_index = 0, series_index = 0;
    pw_text_add(out, "R1?short in n0");
    for (bool across = shunt_first; shunt_index < shunts || series_index < serieses;
         across = !across) {
        if (across && shunt_index < shunts)
            pw_text_print(out, "; %c%d n%d ground", shunt, ++shunt_index, node);
        if (!across && series_index < serieses) {
            pw_text_print(out, "; %c%d n%d n%d", series, ++series_index, node, node + 1);
            node++;
        }
    }
    pw_text_print(out, "; R2?open n%d ground", node);
}

/* Node n<last> is called out. */
static void name_output(expander *e)
{
    const place *last = &e->net.part[e->net.parts - 1];
    const char *name = last->node[0];
    for (int i = 0; i < e->net.parts; i++)
        for (int k = 0; k < e->net.part[i].nodes; k++)
            if (!strcmp(e->net.part[i].node[k], name)) e->net.part[i].node[k] = "out";
}

static bool is_high(const char *name) { return strstr(name, "highpass") != NULL; }

static void make_ladder(expander *e)
{
    pw_text text = {0};
    const char *name = e->kind->name;
    bool rc = !strcmp(name, "rc-ladder"), tee = name[strlen(name) - 1] == 't';
    char shunt = is_high(name) ? 'L' : 'C', series = is_high(name) ? 'C' : 'L';
    int resistors = highest(e->cell, 'R'), capacitors = highest(e->cell, 'C');
    int shunts = highest(e->cell, shunt), serieses = highest(e->cell, series);
    if (rc) {
        int given = resistors > capacitors ? resistors : capacitors;
        rc_ladder(e->stages ? e->stages : given ? given : 1, &text);
    } else {
        if (!shunts && (tee || !serieses)) shunts = 1;
        if (!serieses && (!tee || !shunts)) serieses = tee;
        rlc_ladder(shunt, series, !tee, shunts, serieses, &text);
    }
    parse(pw_text_string(&text), e->arena, &e->net);
    if (!rc) name_output(e);
    pw_text_free(&text);
}

/* ---- Values ---- */

static const pw_cell_value *find_value(const pw_cell *cell, const char *name)
{
    for (int i = 0; i < cell->values; i++)
        if (!strcmp(cell->value[i].name, name)) return &cell->value[i];
    return NULL;
}

static bool is_rc_ladder(const expander *e) { return !strcmp(e->kind->name, "rc-ladder"); }

/* A part's value; later stages of an RC ladder take after the first. */
static const pw_cell_value *value_of(const expander *e, const char *name)
{
    const pw_cell_value *found = find_value(e->cell, name);
    if (!found && is_rc_ladder(e) && e->stages)
        return find_value(e->cell, name[0] == 'R' ? "R1" : "C1");
    return found;
}

static void check_value(expander *e, int index)
{
    const pw_cell_value *v = &e->cell->value[index];
    const char *known[MOST_PARTS + 1];
    int n = 0;
    for (int i = 0; i < index; i++)
        if (!strcmp(e->cell->value[i].name, v->name))
            pw_error(e->messages, v->at, "part '%s' has two values; expected one", v->name);
    if (is_rc_ladder(e)) known[n++] = "stages";
    for (int i = 0; i < e->net.parts; i++)
        if (e->net.part[i].name[0] != 'U') known[n++] = e->net.part[i].name;
    for (int i = 0; i < n; i++)
        if (!strcmp(known[i], v->name)) {
            if (!(v->value > 0 && isfinite(v->value)))
                pw_error(e->messages, v->at,
                         "the value of '%s' is impossible; expected a number above 0", v->name);
            return;
        }
    const char *near = pw_nearest(v->name, known, n);
    pw_text list = {0};
    for (int i = 0; i < n; i++) pw_text_print(&list, "%s%s", i ? ", " : "", known[i]);
    pw_error(e->messages, v->at, "the cell '%s' has no part '%s'; expected %s%s%sone of %s",
             e->kind->name, v->name, near ? "'" : "", near ? near : "", near ? "', or " : "",
             pw_text_string(&list));
    pw_text_free(&list);
}

static void check_missing(expander *e)
{
    for (int i = 0; i < e->net.parts; i++) {
        const place *p = &e->net.part[i];
        if (p->name[0] == 'U' || p->otherwise || value_of(e, p->name)) continue;
        pw_error(e->messages, e->cell->at, "the cell '%s' lacks its part '%s'; expected '%s: %s'",
                 e->kind->name, p->name, p->name,
                 p->name[0] == 'R'   ? "10k"
                 : p->name[0] == 'C' ? "10n"
                                     : "1 mH");
    }
}

static void read_stages(expander *e)
{
    const pw_cell_value *v = is_rc_ladder(e) ? find_value(e->cell, "stages") : NULL;
    if (!v) return;
    e->stages = v->value >= 1 && v->value <= MOST_STAGES ? (int)v->value : 1;
    if (e->stages != v->value)
        pw_error(e->messages, v->at,
                 "stages is not a whole number from 1 to %d; expected how many RC "
                 "stages follow each other",
                 MOST_STAGES);
}

/* ---- Expansion ---- */

static bool has_name_of_its_own(const char *node)
{
    return !strcmp(node, "ground") || !strcmp(node, "in") || !strcmp(node, "out");
}

/* A part left out that is a wire: one node's name replaces the other's. */
static void make_wire(net *n, const place *wire)
{
    const char *keep = wire->node[0], *drop = wire->node[1];
    if (has_name_of_its_own(drop)) {
        keep = wire->node[1];
        drop = wire->node[0];
    }
    for (int i = 0; i < n->parts; i++)
        for (int k = 0; k < n->part[i].nodes; k++)
            if (!strcmp(n->part[i].node[k], drop)) n->part[i].node[k] = keep;
}

static void add_part(expander *e, const place *p, pw_circuit *out)
{
    pw_part *part = &out->part[out->parts++];
    const pw_cell_value *value = value_of(e, p->name);
    pw_where at = value ? value->at : e->cell->at;
    *part = (pw_part){.name = p->name, .at = at, .value_at = at, .ideal = true, .kind = PW_OP_AMP};
    for (int k = 0; k < p->nodes; k++) {
        part->node[k] = p->node[k];
        part->node_at[k] = at;
    }
    if (!value) return;
    part->kind = p->name[0] == 'R' ? PW_RESISTOR : p->name[0] == 'C' ? PW_CAPACITOR : PW_INDUCTOR;
    part->value = value->value;
    part->tolerance = value->tolerance;
    part->normal = value->normal;
}

static void fill_circuit(expander *e, pw_circuit *out)
{
    *out = (pw_circuit){.current_input = e->kind->current, .input = "in", .output = {"out", NULL},
                        .source_resistance = e->kind->current ? (double)INFINITY : 0,
                        .at = e->cell->at, .input_at = e->cell->kind_at,
                        .output_at = {e->cell->kind_at, e->cell->kind_at}};
    out->part = pw_arena_take(e->arena, (size_t)(e->net.parts + 1) * sizeof *out->part);
    for (int i = 0; i < e->net.parts; i++)
        if (e->net.part[i].otherwise == 's' && !value_of(e, e->net.part[i].name))
            make_wire(&e->net, &e->net.part[i]);
    for (int i = 0; i < e->net.parts; i++)
        if (e->net.part[i].name[0] == 'U' || value_of(e, e->net.part[i].name))
            add_part(e, &e->net.part[i], out);
}

static pw_status refuse_kind(const pw_cell *cell, pw_messages *messages)
{
    const char *known[100];
    int n = 0;
    for (; pw_cell_row(n); n++) known[n] = pw_cell_row(n)->name;
    const char *near = pw_nearest(cell->kind, known, n);
    pw_error(messages, cell->kind_at,
             "there is no cell '%s'; expected %s%s%sa kind that 'polewright show "
             "--cells' lists",
             cell->kind, near ? "'" : "", near ? near : "", near ? "', or " : "");
    return PW_WRONG;
}

void pw_cells_check_kinds(const pw_analog_spec *spec, pw_messages *messages)
{
    if (spec->kind == PW_ANALOG_CELL && spec->cell.kind && !pw_cell_find(spec->cell.kind))
        (void)refuse_kind(&spec->cell, messages);
    for (int i = 0; spec->kind == PW_ANALOG_CASCADE && spec->member && i < spec->members; i++)
        pw_cells_check_kinds(&spec->member[i], messages);
}

pw_status pw_cell_expand(const pw_cell *cell, pw_arena *arena, pw_circuit *out,
                         pw_messages *messages)
{
    int before = messages->errors;
    expander e = {
        .cell = cell, .kind = pw_cell_find(cell->kind), .arena = arena, .messages = messages};
    *out = (pw_circuit){0};
    if (!e.kind) return refuse_kind(cell, messages);
    read_stages(&e);
    if (e.kind->net) parse(e.kind->net, arena, &e.net);
    else make_ladder(&e);
    for (int i = 0; i < cell->values; i++) check_value(&e, i);
    check_missing(&e);
    if (messages->errors > before) return PW_WRONG;
    fill_circuit(&e, out);
    return PW_OK;
}

pw_status pw_analog_from_cell(const pw_cell *cell, pw_roots *out, pw_messages *messages)
{
    pw_arena arena = {0};
    pw_circuit circuit;
    *out = (pw_roots){0};
    pw_status status = pw_cell_expand(cell, &arena, &circuit, messages);
    if (!status) status = pw_analog_from_circuit(&circuit, out, messages);
    pw_arena_free(&arena);
    return status;
}

/* ---- The list ---- */

static void list_parts(const pw_cell_kind *kind, pw_text *out)
{
    if (!kind->net) {
        pw_text_add(out, !strcmp(kind->name, "rc-ladder") ? "R1 C1 .. Rn Cn, stages"
                                                          : "L1 C1 .. [R1 R2]");
        return;
    }
    pw_arena arena = {0};
    net *n = pw_arena_take(&arena, sizeof *n);
    parse(kind->net, &arena, n);
    for (int pass = 0, some = 0; pass < 2; pass++) {
        for (int i = 0; i < n->parts; i++) {
            const place *p = &n->part[i];
            if (p->name[0] == 'U' || (p->otherwise != 0) != pass) continue;
            pw_text_print(out, "%s%s%s", some ? " " : "", pass && some < 100 ? "[" : "", p->name);
            some = pass ? 100 : 1;
        }
        if (pass && some == 100) pw_text_add(out, "]");
    }
    pw_arena_free(&arena);
}

static void list_diagram(const char *diagram, pw_text *out)
{
    while (*diagram) {
        const char *end = strchr(diagram, '\n');
        pw_text_add(out, "      ");
        pw_text_add_bytes(out, diagram, (size_t)(end + 1 - diagram));
        diagram = end + 1;
    }
}

void pw_cells_list(pw_text *out)
{
    pw_text_add(
        out, "Cells: textbook circuits by name. Parts in [brackets] may be left out; op-amps are "
             "ideal.\n  cell: {kind: rc-lowpass, R1: 10k, C1: {value: 4n7, tolerance: 5 %}}\n");
    for (int i = 0; pw_cell_row(i); i++) {
        const pw_cell_kind *kind = pw_cell_row(i);
        pw_text_print(out, "\n  %s: %s\n      parts: ", kind->name, kind->about);
        list_parts(kind, out);
        pw_text_print(out, "\n      H(s) = %s\n      %s\n      (%s)\n", kind->formula,
                      pw_cell_figures(kind->name), kind->source);
        list_diagram(kind->diagram, out);
    }
}
