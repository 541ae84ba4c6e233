/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Where signals can go in a schematic: feedback, and the way from input to output. */
#include <string.h>

#include "analog/circuit_check.h"

/* ---- Reaching ---- */

static bool reach(const pw_checker *c, bool *reached, int node, bool through_held)
{
    if (node < 0 || reached[node] || (c->held[node] && !through_held)) return false;
    reached[node] = true;
    return true;
}

static bool is_reached(const bool *reached, int node) { return node >= 0 && reached[node]; }

static bool step_coupling(const pw_checker *c, const pw_part *part, bool *reached)
{
    bool any = false, grew = false;
    for (int pass = 0; pass < 2; pass++)
        for (int i = 0; i < c->circuit->parts; i++) {
            const pw_part *l = &c->circuit->part[i];
            if (l->kind != PW_INDUCTOR
                || (strcmp(l->name, part->node[0]) && strcmp(l->name, part->node[1])))
                continue;
            int a = pw_checker_node(c, l, 0), b = pw_checker_node(c, l, 1);
            any |= is_reached(reached, a) || is_reached(reached, b);
            if (pass && any) {
                grew |= reach(c, reached, a, false);
                grew |= reach(c, reached, b, false);
            }
        }
    return grew;
}

/* One part carries what reached its senses or an end on; true where it reached a new node. */
static bool step(const pw_checker *c, const pw_part *part, bool *reached)
{
    int n[4] = {-1, -1, -1, -1};
    for (int k = 0; k < pw_circuit_part_nodes(part->kind); k++) n[k] = pw_checker_node(c, part, k);
    bool first = is_reached(reached, n[0]) || is_reached(reached, n[1]), grew = false;
    switch (part->kind) {
    case PW_RESISTOR: case PW_CAPACITOR: case PW_INDUCTOR:
        for (int k = 0; k < 2 && first; k++) grew |= reach(c, reached, n[k], false);
        return grew;
    case PW_OP_AMP: return first && reach(c, reached, n[2], true);
    case PW_AMPLIFIER: case PW_TRANSCONDUCTOR:
        first |= is_reached(reached, n[2]) || is_reached(reached, n[3]);
        for (int k = 2; k < 4 && first; k++)
            grew |= reach(c, reached, n[k], part->kind == PW_AMPLIFIER);
        return grew;
    case PW_COUPLING: return step_coupling(c, part, reached);
    }
    return false;
}

static void spread_from(const pw_checker *c, bool *reached)
{
    bool grew = true;
    while (grew) {
        grew = false;
        for (int i = 0; i < c->circuit->parts; i++) grew |= step(c, &c->circuit->part[i], reached);
    }
}

void pw_check_feedback_paths(pw_checker *c)
{
    for (int i = 0; i < c->circuit->parts; i++) {
        const pw_part *part = &c->circuit->part[i];
        if (part->kind != PW_OP_AMP) continue;
        bool reached[PW_MAX_UNKNOWNS] = {false};
        reach(c, reached, pw_checker_node(c, part, 2), true);
        spread_from(c, reached);
        if (is_reached(reached, pw_checker_node(c, part, 0))
            || is_reached(reached, pw_checker_node(c, part, 1)))
            continue;
        if (part->ideal)
            pw_error(c->messages, part->at,
                     "op-amp '%s' has no feedback path from its output to its "
                     "inputs; expected one, for an ideal op-amp's output is what makes them equal",
                     part->name);
        else
            pw_warning(c->messages, part->at,
                       "op-amp '%s' has no feedback path from its output to its "
                       "inputs and runs at its full gain; expected feedback",
                       part->name);
    }
}

void pw_check_path(pw_checker *c)
{
    bool reached[PW_MAX_UNKNOWNS] = {false};
    reach(c, reached, pw_net_node(&c->net, c->circuit->input), true);
    spread_from(c, reached);
    if (is_reached(reached, c->net.output[0]) || is_reached(reached, c->net.output[1])) return;
    pw_error(c->messages, c->circuit->output_at[0],
             "no path leads from the input '%s' to the output '%s'; "
             "expected parts that connect them",
             c->circuit->input, c->circuit->output[0]);
}

/* ---- Feedback at DC ---- */

/* v(plus) - v(minus) for 1 V at what op-amp i drives, everything else at work, the input at rest,
 * as s goes to 0. */
static double loop_gain_sign(const pw_net *net, int i)
{
    const pw_driver *d = &net->driver[i];
    pw_net cut = *net;
    cut.arena = (pw_arena){0};
    cut.entry = pw_arena_take(&cut.arena, (size_t)(net->entries + 1) * sizeof *cut.entry);
    cut.store = pw_arena_take(&cut.arena, (size_t)(net->stores + 1) * sizeof *cut.store);
    cut.entries = 0;
    for (int k = 0; k < net->entries; k++)
        if (net->entry[k].row != d->row) cut.entry[cut.entries++] = net->entry[k];
    cut.entry[cut.entries++] = (pw_entry){d->row, d->drive, 1, 0};
    memcpy(cut.store, net->store, (size_t)net->stores * sizeof *cut.store);
    for (int k = 0; k < net->stores; k++)
        if (net->store[k].row[0] == d->row) cut.store[k].row[0] = -1;
    cut.input = d->row;
    cut.output[0] = d->plus;
    cut.output[1] = d->minus;
    double gain = creal(pw_net_response_quad(&cut, 1e-9 * pw_net_reference(net)));
    pw_arena_free(&cut.arena);
    return gain;
}

void pw_circuit_check_feedback(const pw_circuit *circuit, const pw_net *net, pw_messages *messages)
{
    for (int i = 0; i < net->drivers; i++) {
        const pw_part *part = &circuit->part[net->driver[i].part];
        if (loop_gain_sign(net, i) > 1e-6)
            pw_warning(
                messages, part->at,
                "the feedback of op-amp '%s' is positive at DC, where a real "
                "one latches; expected more of its output at 'minus' than at 'plus' (are the two "
                "exchanged?)",
                part->name);
    }
}
