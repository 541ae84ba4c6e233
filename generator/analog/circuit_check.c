/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What a designer would see wrong on the schematic, told at its line. */
#include "analog/circuit.h"

#include <math.h>
#include <stdio.h>
#include <string.h>
#include <strings.h>

#include "base/nearest.h"

#define CHECK_PARTS 120          /* more parts than this are not one analog stage */

typedef struct checker {
    const pw_circuit *circuit;
    pw_net net;
    pw_messages *messages;
    int island[PW_MAX_UNKNOWNS + 1];     /* union-find; the last but nodes is ground */
    bool held[PW_MAX_UNKNOWNS];          /* an ideal source or output fixes the node's voltage */
} checker;

/* Names that differ in their number only ("n1", "n2") are neighbours, not slips of the pen. */
static bool same_but_for_digits(const char *a, const char *b)
{
    static const char digits[] = "0123456789";
    size_t n = strcspn(a, digits);
    bool numbered = a[n] && b[n] && strspn(a + n, digits) == strlen(a + n)
                    && strspn(b + n, digits) == strlen(b + n);
    return numbered && !strncmp(a, b, n);
}

static const char *suggest_node(const checker *c, const char *name, const char *prefix)
{
    const char *known[PW_MAX_UNKNOWNS + 1];
    int n = 0;
    known[n++] = "ground";
    for (int i = 0; i < c->net.nodes; i++)
        if (c->net.node[i] && strcmp(c->net.node[i], name) && !same_but_for_digits(c->net.node[i], name))
            known[n++] = c->net.node[i];
    const char *near = pw_nearest(name, known, n);
    if (!strcasecmp(name, "gnd") || !strcmp(name, "0")) near = "ground";
    return near ? pw_arena_print((pw_arena *)&c->net.arena, "%s'%s'", prefix, near) : "";
}

/* ---- Values and names ---- */

static bool value_in_range(const pw_part *part)
{
    switch (part->kind) {
    case PW_RESISTOR: case PW_CAPACITOR: case PW_INDUCTOR:
        return part->value > 0 && isfinite(part->value);
    case PW_COUPLING: return fabs(part->value) < 1 && part->value != 0;
    case PW_AMPLIFIER: case PW_TRANSCONDUCTOR: return part->value != 0 && isfinite(part->value);
    case PW_OP_AMP: return true;
    }
    return true;
}

static void check_values(const pw_circuit *circuit, pw_messages *messages)
{
    for (int i = 0; i < circuit->parts; i++) {
        const pw_part *part = &circuit->part[i];
        if (!value_in_range(part))
            pw_error(messages, part->value_at.line ? part->value_at : part->at,
                     "the value of part '%s' is missing or impossible; expected %s", part->name,
                     part->kind == PW_COUPLING ? "a coupling between -1 and 1, not 0"
                     : part->kind == PW_AMPLIFIER || part->kind == PW_TRANSCONDUCTOR
                         ? "a number other than 0" : "a number above 0");
        for (int j = 0; j < i; j++)
            if (!strcmp(part->name, circuit->part[j].name))
                pw_error(messages, part->at, "a second part is named '%s' (the first is at line %d); "
                         "expected a name of its own", part->name, circuit->part[j].at.line);
    }
}

/* Whether k's of all couplings together leave an inductance matrix of positive energy. */
static bool couplings_are_possible(const pw_net *net)
{
    double k[PW_MAX_STORES][PW_MAX_STORES] = {{0}};
    for (int i = 0; i < net->stores; i++) k[i][i] = 1;
    for (int i = 0; i < net->mutuals; i++) {
        const pw_mutual *m = &net->mutual[i];
        k[m->store[0]][m->store[1]] = k[m->store[1]][m->store[0]] = net->value[m->value].x;
    }
    for (int i = 0; i < net->stores; i++) {              /* Cholesky's pivots */
        if (k[i][i] <= 0) return false;
        for (int r = i + 1; r < net->stores; r++)
            for (int c = i + 1; c < net->stores; c++) k[r][c] -= k[r][i] * k[i][c] / k[i][i];
    }
    return true;
}

static void check_couplings(checker *c)
{
    const pw_circuit *circuit = c->circuit;
    const char *known[CHECK_PARTS];
    int n = 0, bad = 0;
    pw_where at = circuit->at;
    for (int i = 0; i < circuit->parts; i++)
        if (circuit->part[i].kind == PW_INDUCTOR) known[n++] = circuit->part[i].name;
    for (int i = 0; i < circuit->parts; i++) {
        const pw_part *part = &circuit->part[i];
        if (part->kind != PW_COUPLING) continue;
        at = part->at;
        for (int k = 0; k < 2; k++) {
            bool found = false;
            for (int j = 0; j < n; j++) found |= !strcmp(known[j], part->node[k]);
            if (found) continue;
            const char *near = pw_nearest(part->node[k], known, n);
            bad++;
            pw_error(c->messages, part->node_at[k], "there is no inductor '%s' to couple; expected "
                     "the name of an inductor%s%s%s", part->node[k], near ? ", such as '" : "",
                     near ? near : "", near ? "'" : "");
        }
        if (!strcmp(part->node[0], part->node[1])) {
            bad++;
            pw_error(c->messages, part->node_at[1], "inductor '%s' is coupled to itself; expected two "
                     "inductors", part->node[1]);
        }
    }
    if (!bad && c->net.mutuals && !couplings_are_possible(&c->net))
        pw_error(c->messages, at, "these couplings cannot hold together: some currents would store "
                 "negative energy; expected smaller ones");
}

/* ---- Nodes ---- */

static bool check_ports(checker *c)
{
    const pw_circuit *circuit = c->circuit;
    int before = c->messages->errors;
    if (!strcmp(circuit->input, "ground"))
        pw_error(c->messages, circuit->input_at, "the input is 'ground'; expected another node");
    else if (c->net.no_input)
        pw_error(c->messages, circuit->input_at, "no part is at the input's node '%s'; expected a node "
                 "of the circuit%s", circuit->input, suggest_node(c, circuit->input, ", such as "));
    for (int k = 0; k < 2 && circuit->output[k]; k++) {
        int node = pw_net_node(&c->net, circuit->output[k]);
        bool used = node == -1;
        for (int i = 0; i < circuit->parts; i++)
            for (int t = 0; t < pw_circuit_part_nodes(circuit->part[i].kind); t++)
                used |= !strcmp(circuit->part[i].node[t], circuit->output[k]);
        if (!used)
            pw_error(c->messages, circuit->output_at[k], "no part is at the output's node '%s'; expected "
                     "a node of the circuit%s", circuit->output[k],
                     suggest_node(c, circuit->output[k], ", such as "));
    }
    bool same = c->net.output[0] == c->net.output[1];
    if (same && c->messages->errors == before)
        pw_error(c->messages, circuit->output_at[0], "the output is shorted: both its ends are '%s'; "
                 "expected two different nodes", circuit->output[0]);
    return c->messages->errors == before;
}

static void check_connections(checker *c)
{
    int count[PW_MAX_UNKNOWNS] = {0};
    const pw_circuit *circuit = c->circuit;
    for (int i = 0; i < circuit->parts; i++)
        for (int t = 0; t < pw_circuit_part_nodes(circuit->part[i].kind); t++) {
            int node = pw_net_node(&c->net, circuit->part[i].node[t]);
            if (node >= 0) count[node]++;
        }
    int in = pw_net_node(&c->net, circuit->input);
    if (in >= 0) count[in] += count[in] > 0;
    for (int k = 0; k < 2; k++)
        if (c->net.output[k] >= 0) count[c->net.output[k]] += count[c->net.output[k]] > 0;
    for (int i = 0; i < c->net.nodes; i++)
        if (count[i] == 1)
            pw_error(c->messages, c->net.node_at[i], "node '%s' has one connection only; expected two or "
                     "more%s", c->net.node[i], suggest_node(c, c->net.node[i], ", or did you mean "));
}

static void check_tolerances(const checker *c)
{
    for (int i = 0; i < c->circuit->parts; i++) {
        const pw_part *part = &c->circuit->part[i];
        if (part->kind == PW_OP_AMP && part->tolerance > 0 && !(part->gain_bandwidth_hz > 0))
            pw_warning(c->messages, part->at, "the tolerance of op-amp '%s' does nothing: it is that of a "
                       "gain-bandwidth, and this one has none; expected a gain-bandwidth", part->name);
    }
}

static void check_shorted_parts(checker *c)
{
    for (int i = 0; i < c->circuit->parts; i++) {
        const pw_part *part = &c->circuit->part[i];
        int pairs = pw_circuit_part_nodes(part->kind) == 4 ? 4 : 2;
        bool wires = part->kind == PW_RESISTOR || part->kind == PW_CAPACITOR || part->kind == PW_INDUCTOR;
        for (int t = 0; t < pairs && part->kind != PW_COUPLING; t += 2) {
            if (strcmp(part->node[t], part->node[t + 1])) continue;
            if (wires)
                pw_warning(c->messages, part->node_at[t + 1], "both ends of part '%s' are at node '%s', "
                           "so that it does nothing; expected two nodes", part->name, part->node[t]);
            else
                pw_error(c->messages, part->node_at[t + 1], "%s of part '%s' is node '%s' twice; expected "
                         "two nodes", t ? "the drive" : "the input", part->name, part->node[t]);
        }
    }
}

/* ---- Islands and loops of sources ---- */

static int find(checker *c, int node)
{
    int i = node < 0 ? c->net.nodes : node;
    while (c->island[i] != i) i = c->island[i] = c->island[c->island[i]];
    return i;
}

/* false: the two were joined already */
static bool join(checker *c, int a, int b)
{
    int x = find(c, a), y = find(c, b);
    c->island[x] = y;
    return x != y;
}

static void separate(checker *c)
{
    for (int i = 0; i <= c->net.nodes; i++) c->island[i] = i;
}

static int node_of(const checker *c, const pw_part *part, int k)
{
    return pw_net_node(&c->net, part->node[k]);
}

static bool ideal_output(const pw_part *part)
{
    return part->kind == PW_OP_AMP && (part->ideal || !(part->output_resistance > 0));
}

/* Two nodes whose voltage difference an ideal source sets; false: the part is no such source. */
static bool source_ends(const checker *c, const pw_part *part, int *a, int *b)
{
    if (ideal_output(part)) {
        *a = node_of(c, part, 2);
        *b = -1;
        return true;
    }
    if (part->kind != PW_AMPLIFIER) return false;
    *a = node_of(c, part, 2);
    *b = node_of(c, part, 3);
    return true;
}

static bool input_is_ideal(const pw_circuit *circuit)
{
    return !circuit->current_input && !(circuit->source_resistance > 0);
}

static void check_source_loops(checker *c)
{
    int a, b;
    separate(c);
    if (input_is_ideal(c->circuit)) join(c, pw_net_node(&c->net, c->circuit->input), -1);
    for (int i = 0; i < c->circuit->parts; i++) {
        const pw_part *part = &c->circuit->part[i];
        if (source_ends(c, part, &a, &b) && !join(c, a, b))
            pw_error(c->messages, part->at, "the output of part '%s' closes a loop of ideal sources (the "
                     "input, op-amp and amplifier outputs); expected a resistor between two outputs",
                     part->name);
    }
}

static void join_parts(checker *c)
{
    for (int i = 0; i < c->circuit->parts; i++) {
        const pw_part *part = &c->circuit->part[i];
        switch (part->kind) {
        case PW_RESISTOR: case PW_CAPACITOR: case PW_INDUCTOR:
            join(c, node_of(c, part, 0), node_of(c, part, 1));
            break;
        case PW_OP_AMP: join(c, node_of(c, part, 2), -1); break;
        case PW_AMPLIFIER: case PW_TRANSCONDUCTOR:
            join(c, node_of(c, part, 2), node_of(c, part, 3));
            break;
        case PW_COUPLING: break;
        }
    }
}

static void check_islands(checker *c)
{
    const pw_circuit *circuit = c->circuit;
    separate(c);
    join_parts(c);
    int in = pw_net_node(&c->net, circuit->input);
    if (!circuit->current_input || (circuit->source_resistance > 0 && isfinite(circuit->source_resistance)))
        join(c, in, -1);
    if (circuit->load.given) join(c, c->net.output[0], c->net.output[1]);
    for (int i = 0; i < c->net.nodes; i++) {
        char names[200] = "";
        if (!c->net.node[i] || find(c, i) == find(c, -1)) continue;
        bool first = true;
        for (int j = 0; j < c->net.nodes; j++) {
            if (!c->net.node[j] || find(c, j) != find(c, i)) continue;
            first &= j >= i;
            if (strlen(names) + strlen(c->net.node[j]) + 8 < sizeof names)
                snprintf(names + strlen(names), sizeof names - strlen(names), "%s'%s'",
                         *names ? ", " : "", c->net.node[j]);
        }
        if (!first) continue;
        bool alone = !strchr(names, ',');
        pw_error(c->messages, c->net.node_at[i], "node%s %s float%s: no part ties %s to ground or to the "
                 "input; expected a path for %s current", alone ? "" : "s", names, alone ? "s" : "",
                 alone ? "it" : "them", alone ? "its" : "their");
    }
}

/* ---- Paths ---- */

static bool reach(const checker *c, bool *reached, int node, bool through_held)
{
    if (node < 0 || reached[node] || (c->held[node] && !through_held)) return false;
    reached[node] = true;
    return true;
}

static bool is_reached(const bool *reached, int node) { return node >= 0 && reached[node]; }

static bool step_coupling(const checker *c, const pw_part *part, bool *reached)
{
    bool any = false, grew = false;
    for (int pass = 0; pass < 2; pass++)
        for (int i = 0; i < c->circuit->parts; i++) {
            const pw_part *l = &c->circuit->part[i];
            if (l->kind != PW_INDUCTOR || (strcmp(l->name, part->node[0]) && strcmp(l->name, part->node[1])))
                continue;
            int a = node_of(c, l, 0), b = node_of(c, l, 1);
            any |= is_reached(reached, a) || is_reached(reached, b);
            if (pass && any) {
                grew |= reach(c, reached, a, false);
                grew |= reach(c, reached, b, false);
            }
        }
    return grew;
}

/* One part carries what reached its senses or an end on; true where it reached a new node. */
static bool step(const checker *c, const pw_part *part, bool *reached)
{
    int n[4] = {-1, -1, -1, -1};
    for (int k = 0; k < pw_circuit_part_nodes(part->kind); k++) n[k] = node_of(c, part, k);
    bool first = is_reached(reached, n[0]) || is_reached(reached, n[1]), grew = false;
    switch (part->kind) {
    case PW_RESISTOR: case PW_CAPACITOR: case PW_INDUCTOR:
        for (int k = 0; k < 2 && first; k++) grew |= reach(c, reached, n[k], false);
        return grew;
    case PW_OP_AMP: return first && reach(c, reached, n[2], true);
    case PW_AMPLIFIER: case PW_TRANSCONDUCTOR:
        first |= is_reached(reached, n[2]) || is_reached(reached, n[3]);
        for (int k = 2; k < 4 && first; k++) grew |= reach(c, reached, n[k], part->kind == PW_AMPLIFIER);
        return grew;
    case PW_COUPLING: return step_coupling(c, part, reached);
    }
    return false;
}

static void spread_from(const checker *c, bool *reached)
{
    bool grew = true;
    while (grew) {
        grew = false;
        for (int i = 0; i < c->circuit->parts; i++) grew |= step(c, &c->circuit->part[i], reached);
    }
}

static void check_feedback_paths(checker *c)
{
    for (int i = 0; i < c->circuit->parts; i++) {
        const pw_part *part = &c->circuit->part[i];
        if (part->kind != PW_OP_AMP) continue;
        bool reached[PW_MAX_UNKNOWNS] = {false};
        reach(c, reached, node_of(c, part, 2), true);
        spread_from(c, reached);
        if (is_reached(reached, node_of(c, part, 0)) || is_reached(reached, node_of(c, part, 1))) continue;
        if (part->ideal)
            pw_error(c->messages, part->at, "op-amp '%s' has no feedback path from its output to its "
                     "inputs; expected one, for an ideal op-amp's output is what makes them equal",
                     part->name);
        else
            pw_warning(c->messages, part->at, "op-amp '%s' has no feedback path from its output to its "
                       "inputs and runs at its full gain; expected feedback", part->name);
    }
}

static void check_path(checker *c)
{
    bool reached[PW_MAX_UNKNOWNS] = {false};
    reach(c, reached, pw_net_node(&c->net, c->circuit->input), true);
    spread_from(c, reached);
    if (is_reached(reached, c->net.output[0]) || is_reached(reached, c->net.output[1])) return;
    pw_error(c->messages, c->circuit->output_at[0], "no path leads from the input '%s' to the output '%s'; "
             "expected parts that connect them", c->circuit->input, c->circuit->output[0]);
}

static void mark_held(checker *c)
{
    int a, b;
    if (input_is_ideal(c->circuit)) {
        int in = pw_net_node(&c->net, c->circuit->input);
        if (in >= 0) c->held[in] = true;
    }
    for (int i = 0; i < c->circuit->parts; i++)
        if (source_ends(c, &c->circuit->part[i], &a, &b) && a >= 0 && b < 0) c->held[a] = true;
}

void pw_circuit_check(const pw_circuit *circuit, pw_messages *messages)
{
    checker c = {.circuit = circuit, .messages = messages};
    int before = messages->errors;
    if (circuit->parts > CHECK_PARTS) {
        pw_error(messages, circuit->at, "the circuit has %d parts; expected at most %d (a cascade of "
                 "smaller circuits)", circuit->parts, CHECK_PARTS);
        return;
    }
    check_values(circuit, messages);
    pw_net_make(circuit, &c.net);
    if (c.net.unknowns >= PW_MAX_UNKNOWNS || c.net.stores > PW_MAX_STORES) {
        pw_error(messages, circuit->at, "the circuit has %d node voltages and branch currents and %d "
                 "reactive parts; expected at most %d and %d (a cascade of smaller circuits)",
                 c.net.unknowns, c.net.stores, PW_MAX_UNKNOWNS - 1, PW_MAX_STORES);
        pw_net_free(&c.net);
        return;
    }
    bool ports = check_ports(&c);
    check_couplings(&c);
    check_shorted_parts(&c);
    check_tolerances(&c);
    check_connections(&c);
    check_source_loops(&c);
    mark_held(&c);
    check_feedback_paths(&c);
    if (ports && messages->errors == before) check_islands(&c);
    if (ports && messages->errors == before) check_path(&c);
    pw_net_free(&c.net);
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
            pw_warning(messages, part->at, "the feedback of op-amp '%s' is positive at DC, where a real "
                       "one latches; expected more of its output at 'minus' than at 'plus' (are the two "
                       "exchanged?)", part->name);
    }
}
