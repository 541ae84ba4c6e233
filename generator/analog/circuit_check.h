/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the checks of a schematic share. */
#ifndef PW_ANALOG_CIRCUIT_CHECK_H
#define PW_ANALOG_CIRCUIT_CHECK_H

#include <string.h>

#include "analog/circuit.h"

typedef struct pw_checker {
    const pw_circuit *circuit;
    pw_net net;
    pw_messages *messages;
    int island[PW_MAX_UNKNOWNS + 1];     /* union-find; the one after the last node is ground */
    bool held[PW_MAX_UNKNOWNS];          /* an ideal source or output fixes the node's voltage */
} pw_checker;

/* The unknown of a part's node k; -1: ground. */
static inline int pw_checker_node(const pw_checker *c, const pw_part *part, int k)
{
    return pw_net_node(&c->net, part->node[k]);
}

/* Two nodes whose voltage difference an ideal source sets; false: the part is no such source. */
bool pw_checker_source(const pw_checker *c, const pw_part *part, int *a, int *b);
bool pw_checker_input_is_ideal(const pw_circuit *circuit);

/* Each op-amp has feedback; a path leads from the input to the output. */
void pw_check_feedback_paths(pw_checker *c);
void pw_check_path(pw_checker *c);

#endif
