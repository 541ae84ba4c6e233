/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Inside the reader: what takes a value of the tree and stores it. Every taker complains at the
 * value's place where it does not fit, and then stores nothing. */
#ifndef PW_STAGEFILE_TAKE_H
#define PW_STAGEFILE_TAKE_H

#include "stagefile/keys.h"
#include "stagefile/stage.h"

typedef struct pw_reader {
    pw_stage *stage;
    pw_arena *arena;             /* the stage's */
    pw_messages *messages;
    bool poles;                  /* the list of roots being read is that of the poles */
    const char **taken;          /* "KEY: DEFAULT", ended by a null; see pw_stage */
    int n_taken;
} pw_reader;

/* Reads a map by the table: every key there is taken, absent ones get their defaults, unknown,
 * missing and misplaced ones are told. node null: defaults only. base: the struct of the map. */
void pw_take_map(pw_reader *reader, const char *map, const pw_tree *node, void *base);

/* "KEY is a list; expected ..." at the node; what null: made from the node's kind. */
void pw_take_refuse(pw_reader *reader, const pw_key *key, const pw_tree *node, const char *what);
/* The quantity in a scalar node, in the key's dimension and range. */
bool pw_take_value(pw_reader *reader, const pw_key *key, const pw_tree *node, double *value);
/* The index of the word in a scalar node, or -1, told, where it is none of them. */
int pw_take_index(pw_reader *reader, const pw_key *key, const pw_tree *node);
/* True where the node is a list of the key's length; told otherwise. */
bool pw_take_is_list(pw_reader *reader, const pw_key *key, const pw_tree *node);
void pw_take_place(const pw_key *key, const pw_tree *node, void *base, int index);

/* Generic takers, by what they store at the key's offset. */
pw_taker pw_take_text;           /* const char *: one line, runs of blanks made one */
pw_taker pw_take_word;           /* an enumeration */
pw_taker pw_take_word_text;      /* const char *: the word */
pw_taker pw_take_word_flag;      /* bool: whether it is the second word */
pw_taker pw_take_flag;           /* bool */
pw_taker pw_take_quantity;       /* double */
pw_taker pw_take_given;          /* pw_given */
pw_taker pw_take_pair;           /* double[2], rising; places in pw_where[2] */
pw_taker pw_take_count;          /* int */
pw_taker pw_take_seed;           /* uint64_t */
pw_taker pw_take_submap;         /* the struct of the map sub */

/* read_analog.c */
pw_taker pw_take_roots, pw_take_polynomials, pw_take_family, pw_take_cascade, pw_take_coefficients;
/* read_roots.c */
pw_taker pw_take_root_list, pw_take_q, pw_take_gain;
/* read_circuit.c */
pw_taker pw_take_circuit, pw_take_cell, pw_take_node, pw_take_nodes, pw_take_current_node,
         pw_take_output, pw_take_parts, pw_take_part_value, pw_take_op_amp, pw_take_kind;
/* read_rest.c */
pw_taker pw_take_stage_name, pw_take_target, pw_take_prewarp, pw_take_coefficient, pw_take_band,
    pw_take_forbidden, pw_take_signals;
/* read_signal.c */
pw_taker pw_take_port, pw_take_rails;
void pw_port_default(pw_port *port);   /* full scale 1 V, where the file says nothing */

/* What the maps "root" and "gain" are read into. */
typedef struct pw_root_form {
    pw_given real, imag, frequency, q, damping;
    bool infinite, right;
    pw_where q_at, right_at;
} pw_root_form;

typedef struct pw_gain_form { pw_given at, is, factor; bool invert; } pw_gain_form;

typedef struct pw_cell_form { double value, tolerance; bool normal; pw_where at; } pw_cell_form;

/* read_check.c: what only the whole file can show. */
void pw_stage_check(pw_reader *reader);

#endif
