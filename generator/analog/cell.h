/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Textbook circuits by name. A cell is a table row: its net in a small language, and what people
 * need to know of it. It is expanded into a circuit, and the circuit is solved: one solver. */
#ifndef PW_ANALOG_CELL_H
#define PW_ANALOG_CELL_H

#include "base/text.h"
#include "stagefile/stage.h"

/* The net: parts divided by ';', each "NAME node node" (R, C, L by the first letter) or
 * "U1 plus minus out" (an ideal op-amp). The input is node "in" against ground, the output "out".
 * "R3?open" may be left out and is then no part; "R4?short" is then a wire. */
typedef struct pw_cell_kind {
    const char *name;            /* as the stage file spells it */
    const char *about;           /* one line */
    const char *net;             /* null: a ladder, made by its own rule */
    const char *formula;         /* its response, in ASCII */
    const char *source;          /* where the formula stands */
    const char *diagram;         /* a few lines of text, each ended by a newline */
    bool current;                /* the input is a current */
} pw_cell_kind;

extern const pw_cell_kind pw_cells_passive[], pw_cells_amplifier[], pw_cells_filter[];
extern const int pw_cells_passive_count, pw_cells_amplifier_count, pw_cells_filter_count;

/* f0, Q and gain of the kind of this name by hand, one line of ASCII; null where there is none. */
const char *pw_cell_figures(const char *name);

/* Row i of all kinds in their order of listing; null at the end. */
const pw_cell_kind *pw_cell_row(int i);
/* The row of this name, or null. */
const pw_cell_kind *pw_cell_find(const char *name);

/* The circuit that a cell stands for, its memory from the arena. Messages for an unknown kind, a
 * part that is missing, unknown, given twice, or not above 0. */
PW_CHECKED pw_status pw_cell_expand(const pw_cell *cell, pw_arena *arena, pw_circuit *out,
                                    pw_messages *messages);

/* Messages for the unknown kinds of a stage that has other mistakes, so that one run tells them all.
 * The spec may be incomplete: what could not be read is zero or null. */
void pw_cells_check_kinds(const pw_analog_spec *spec, pw_messages *messages);

/* Every kind with its parts, formula and diagram, for people. */
void pw_cells_list(pw_text *out);

#endif
