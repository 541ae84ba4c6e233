/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What a designer would see wrong on the schematic, told at its line. */
#include "analog/circuit_check.h"

#include <math.h>
#include <stdio.h>
#include <string.h>
#include <strings.h>

#include "base/nearest.h"

#define CHECK_PARTS 120          /* more parts than this are not one analog stage */

/* Names that differ in their number only ("n1", "n2") are neighbours, not slips of the pen. */
static bool same_but_for_digits(const char *a, const char *b)
{
    static const char digits[] = "0123456789";
    size_t n = strcspn(a, digits);
    bool numbered = a[n] && b[n] && strspn(a + n, digits) == strlen(a + n)
                    && strspn(b + n, digits) == strlen(b + n);
    return numbered && !strncmp(a, b, n);
}

static const char *suggest_node(const pw_checker *c, const char *name, const char *prefix)
{
    const char *known[PW_MAX_UNKNOWNS + 1];
    int n = 0;
    known[n++] = "ground";
    for (int i = 0; i < c->net.nodes; i++)
        if (c->net.node[i] && strcmp(c->net.node[i], name)
            && !same_but_for_digits(c->net.node[i], name))
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
                pw_error(messages, part->at,
                         "a second part is named '%s' (the first is at line %d); "
                         "expected a name of its own",
                         part->name, circuit->part[j].at.line);
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

static void check_couplings(pw_checker *c)
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
            pw_error(c->messages, part->node_at[1],
                     "inductor '%s' is coupled to itself; expected two "
                     "inductors",
                     part->node[1]);
        }
    }
    if (!bad && c->net.mutuals && !couplings_are_possible(&c->net))
        pw_error(c->messages, at, "these couplings cannot hold together: some currents would store "
                 "negative energy; expected smaller ones");
}

/* ---- Nodes ---- */

static bool check_ports(pw_checker *c)
{
    const pw_circuit *circuit = c->circuit;
    int before = c->messages->errors;
    if (!strcmp(circuit->input, "ground"))
        pw_error(c->messages, circuit->input_at, "the input is 'ground'; expected another node");
    else if (c->net.no_input)
        pw_error(c->messages, circuit->input_at,
                 "no part is at the input's node '%s'; expected a node "
                 "of the circuit%s",
                 circuit->input, suggest_node(c, circuit->input, ", such as "));
    for (int k = 0; k < 2 && circuit->output[k]; k++) {
        int node = pw_net_node(&c->net, circuit->output[k]);
        bool used = node == -1;
        for (int i = 0; i < circuit->parts; i++)
            for (int t = 0; t < pw_circuit_part_nodes(circuit->part[i].kind); t++)
                used |= !strcmp(circuit->part[i].node[t], circuit->output[k]);
        if (!used)
            pw_error(c->messages, circuit->output_at[k],
                     "no part is at the output's node '%s'; expected "
                     "a node of the circuit%s",
                     circuit->output[k], suggest_node(c, circuit->output[k], ", such as "));
    }
    bool same = c->net.output[0] == c->net.output[1];
    if (same && c->messages->errors == before)
        pw_error(c->messages, circuit->output_at[0],
                 "the output is shorted: both its ends are '%s'; "
                 "expected two different nodes",
                 circuit->output[0]);
    return c->messages->errors == before;
}

static void check_connections(pw_checker *c)
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
            pw_error(c->messages, c->net.node_at[i],
                     "node '%s' has one connection only; expected two or "
                     "more%s",
                     c->net.node[i], suggest_node(c, c->net.node[i], ", or did you mean "));
}

static void check_tolerances(const pw_checker *c)
{
    for (int i = 0; i < c->circuit->parts; i++) {
        const pw_part *part = &c->circuit->part[i];
        if (part->kind == PW_OP_AMP && part->tolerance > 0 && !(part->gain_bandwidth_hz > 0))
            pw_warning(c->messages, part->at,
                       "the tolerance of op-amp '%s' does nothing: it is that of a "
                       "gain-bandwidth, and this one has none; expected a gain-bandwidth",
                       part->name);
    }
}

static void check_shorted_parts(pw_checker *c)
{
    for (int i = 0; i < c->circuit->parts; i++) {
        const pw_part *part = &c->circuit->part[i];
        int pairs = pw_circuit_part_nodes(part->kind) == 4 ? 4 : 2;
        bool wires =
            part->kind == PW_RESISTOR || part->kind == PW_CAPACITOR || part->kind == PW_INDUCTOR;
        for (int t = 0; t < pairs && part->kind != PW_COUPLING; t += 2) {
            if (strcmp(part->node[t], part->node[t + 1])) continue;
            if (wires)
                pw_warning(c->messages, part->node_at[t + 1],
                           "both ends of part '%s' are at node '%s', "
                           "so that it does nothing; expected two nodes",
                           part->name, part->node[t]);
            else
                pw_error(c->messages, part->node_at[t + 1],
                         "%s of part '%s' is node '%s' twice; expected "
                         "two nodes",
                         t ? "the drive" : "the input", part->name, part->node[t]);
        }
    }
}

/* ---- Islands and loops of sources ---- */

static int find(pw_checker *c, int node)
{
    int i = node < 0 ? c->net.nodes : node;
    while (c->island[i] != i) i = c->island[i] = c->island[c->island[i]];
    return i;
}

/* false: the two were joined already */
static bool join(pw_checker *c, int a, int b)
{
    int x = find(c, a), y = find(c, b);
    c->island[x] = y;
    return x != y;
}

static void separate(pw_checker *c)
{
    for (int i = 0; i <= c->net.nodes; i++) c->island[i] = i;
}

static bool ideal_output(const pw_part *part)
{
    return part->kind == PW_OP_AMP && (part->ideal || !(part->output_resistance > 0));
}

bool pw_checker_source(const pw_checker *c, const pw_part *part, int *a, int *b)
{
    if (ideal_output(part)) {
        *a = pw_checker_node(c, part, 2);
        *b = -1;
        return true;
    }
    if (part->kind != PW_AMPLIFIER) return false;
    *a = pw_checker_node(c, part, 2);
    *b = pw_checker_node(c, part, 3);
    return true;
}

bool pw_checker_input_is_ideal(const pw_circuit *circuit)
{
    return !circuit->current_input && !(circuit->source_resistance > 0);
}

static void check_source_loops(pw_checker *c)
{
    int a, b;
    separate(c);
    if (pw_checker_input_is_ideal(c->circuit)) join(c, pw_net_node(&c->net, c->circuit->input), -1);
    for (int i = 0; i < c->circuit->parts; i++) {
        const pw_part *part = &c->circuit->part[i];
        if (pw_checker_source(c, part, &a, &b) && !join(c, a, b))
            pw_error(
                c->messages, part->at,
                "the output of part '%s' closes a loop of ideal sources (the "
                "input, op-amp and amplifier outputs); expected a resistor between two outputs",
                part->name);
    }
}

static void join_parts(pw_checker *c)
{
    for (int i = 0; i < c->circuit->parts; i++) {
        const pw_part *part = &c->circuit->part[i];
        switch (part->kind) {
        case PW_RESISTOR: case PW_CAPACITOR: case PW_INDUCTOR:
            join(c, pw_checker_node(c, part, 0), pw_checker_node(c, part, 1));
            break;
        case PW_OP_AMP: join(c, pw_checker_node(c, part, 2), -1); break;
        case PW_AMPLIFIER: case PW_TRANSCONDUCTOR:
            join(c, pw_checker_node(c, part, 2), pw_checker_node(c, part, 3));
            break;
        case PW_COUPLING: break;
        }
    }
}

static void check_islands(pw_checker *c)
{
    const pw_circuit *circuit = c->circuit;
    separate(c);
    join_parts(c);
    int in = pw_net_node(&c->net, circuit->input);
    if (!circuit->current_input
        || (circuit->source_resistance > 0 && isfinite(circuit->source_resistance)))
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
        pw_error(c->messages, c->net.node_at[i],
                 "node%s %s float%s: no part ties %s to ground or to the "
                 "input; expected a path for %s current",
                 alone ? "" : "s", names, alone ? "s" : "", alone ? "it" : "them",
                 alone ? "its" : "their");
    }
}

static void mark_held(pw_checker *c)
{
    int a, b;
    if (pw_checker_input_is_ideal(c->circuit)) {
        int in = pw_net_node(&c->net, c->circuit->input);
        if (in >= 0) c->held[in] = true;
    }
    for (int i = 0; i < c->circuit->parts; i++)
        if (pw_checker_source(c, &c->circuit->part[i], &a, &b) && a >= 0 && b < 0)
            c->held[a] = true;
}

void pw_circuit_check(const pw_circuit *circuit, pw_messages *messages)
{
    pw_checker c = {.circuit = circuit, .messages = messages};
    int before = messages->errors;
    if (circuit->parts > CHECK_PARTS) {
        pw_error(messages, circuit->at,
                 "the circuit has %d parts; expected at most %d (a cascade of "
                 "smaller circuits)",
                 circuit->parts, CHECK_PARTS);
        return;
    }
    check_values(circuit, messages);
    pw_net_make(circuit, &c.net);
    if (c.net.unknowns >= PW_MAX_UNKNOWNS || c.net.stores > PW_MAX_STORES) {
        pw_error(messages, circuit->at,
                 "the circuit has %d node voltages and branch currents and %d "
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
    pw_check_feedback_paths(&c);
    if (ports && messages->errors == before) check_islands(&c);
    if (ports && messages->errors == before) pw_check_path(&c);
    pw_net_free(&c.net);
}
