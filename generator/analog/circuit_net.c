/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The equations of a circuit, as lists of terms. */
#define __STDC_WANT_IEC_60559_TYPES_EXT__ 1      /* strtof128, sqrtf128 */
#include "analog/circuit.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/text.h"

#define GROUND (-1)

int pw_circuit_part_nodes(pw_part_kind kind)
{
    switch (kind) {
    case PW_RESISTOR: case PW_CAPACITOR: case PW_INDUCTOR: return 2;
    case PW_OP_AMP: return 3;
    case PW_AMPLIFIER: case PW_TRANSCONDUCTOR: return 4;
    case PW_COUPLING: return 0;
    }
    return 0;
}

int pw_net_node(const pw_net *net, const char *name)
{
    if (!strcmp(name, "ground")) return GROUND;
    for (int i = 0; i < net->nodes; i++)
        if (net->node[i] && !strcmp(net->node[i], name)) return i;
    return -2;
}

/* ---- Building the lists ---- */

static int add_value(pw_net *net, pw_value_kind kind, double x, int part)
{
    net->value[net->values] = (pw_value){kind, x, part, {0, 0}};
    return net->values++;
}

static void add_entry(pw_net *net, int row, int column, int sign, int value)
{
    if (row < 0 || column < 0) return;
    net->entry[net->entries++] = (pw_entry){row, column, sign, value};
}

/* The four terms of a two-port: sensed between columns c0 and c1, acting on rows r0 and r1. */
static void add_four(pw_net *net, int r0, int r1, int c0, int c1, int value)
{
    add_entry(net, r0, c0, 1, value);
    add_entry(net, r0, c1, -1, value);
    add_entry(net, r1, c0, -1, value);
    add_entry(net, r1, c1, 1, value);
}

static void add_store(pw_net *net, int r0, int r1, int c0, int c1, int value)
{
    net->store[net->stores++] = (pw_store){{r0, r1}, {c0, c1}, value};
}

static int add_node(pw_net *net, const char *name, pw_where at)
{
    int found = name ? pw_net_node(net, name) : -2;
    if (found != -2) return found;
    net->node[net->nodes] = name;
    net->node_at[net->nodes] = at;
    return net->nodes++;
}

static void add_inductor(pw_net *net, int a, int b, int value)
{
    int i = net->unknowns++;
    add_four(net, a, b, i, -1, 0);
    add_entry(net, i, a, -1, 0);
    add_entry(net, i, b, 1, 0);
    add_store(net, i, -1, i, -1, value);
}

/* (1/A0 + s / (2 pi GBW)) v(e) = v(plus) - v(minus), with Rout between e and the output. */
static void add_op_amp(pw_net *net, int index, const pw_part *part, const int *node, int inner)
{
    int i = net->unknowns++, drives = inner >= 0 ? inner : node[2];
    add_entry(net, drives, i, -1, 0);
    add_entry(net, i, node[0], -1, 0);
    add_entry(net, i, node[1], 1, 0);
    net->driver[net->drivers++] = (pw_driver){index, i, drives, node[0], node[1]};
    if (part->ideal) return;
    if (inner >= 0) {
        int rout = add_value(net, PW_VALUE_INVERSE, part->output_resistance, -1);
        add_four(net, inner, node[2], inner, node[2], rout);
    }
    if (part->dc_gain > 0 && isfinite(part->dc_gain))
        add_entry(net, i, drives, 1, add_value(net, PW_VALUE_INVERSE, part->dc_gain, -1));
    if (part->gain_bandwidth_hz > 0 && isfinite(part->gain_bandwidth_hz))
        add_store(net, i, -1, drives, -1,
                  add_value(net, PW_VALUE_CYCLE, part->gain_bandwidth_hz, index));
}

static void add_amplifier(pw_net *net, const int *node, int gain)
{
    int i = net->unknowns++;
    add_four(net, node[2], node[3], i, -1, 0);
    add_entry(net, i, node[2], 1, 0);
    add_entry(net, i, node[3], -1, 0);
    add_entry(net, i, node[0], -1, gain);
    add_entry(net, i, node[1], 1, gain);
}

static bool has_inner_node(const pw_part *part)
{
    return part->kind == PW_OP_AMP && !part->ideal && part->output_resistance > 0;
}

static void add_part(pw_net *net, int index, int inner)
{
    const pw_part *part = &net->circuit->part[index];
    int n[4] = {GROUND, GROUND, GROUND, GROUND};
    for (int k = 0; k < pw_circuit_part_nodes(part->kind); k++)
        n[k] = pw_net_node(net, part->node[k]);
    switch (part->kind) {
    case PW_RESISTOR:
        add_four(net, n[0], n[1], n[0], n[1], add_value(net, PW_VALUE_INVERSE, part->value, index));
        break;
    case PW_CAPACITOR:
        add_store(net, n[0], n[1], n[0], n[1], add_value(net, PW_VALUE_PLAIN, part->value, index));
        break;
    case PW_INDUCTOR:
        add_inductor(net, n[0], n[1], add_value(net, PW_VALUE_PLAIN, part->value, index));
        break;
    case PW_OP_AMP: add_op_amp(net, index, part, n, inner); break;
    case PW_AMPLIFIER:
        add_amplifier(net, n, add_value(net, PW_VALUE_PLAIN, part->value, index));
        break;
    case PW_TRANSCONDUCTOR:
        add_four(net, n[3], n[2], n[0], n[1], add_value(net, PW_VALUE_PLAIN, part->value, index));
        break;
    case PW_COUPLING: break;
    }
}

static int store_of(const pw_net *net, const char *inductor)
{
    for (int i = 0; i < net->stores; i++) {
        int part = net->value[net->store[i].value].part;
        if (part >= 0 && net->circuit->part[part].kind == PW_INDUCTOR
            && !strcmp(net->circuit->part[part].name, inductor))
            return i;
    }
    return -1;
}

static void add_coupling(pw_net *net, int index)
{
    const pw_part *part = &net->circuit->part[index];
    int a = store_of(net, part->node[0]), b = store_of(net, part->node[1]);
    if (a < 0 || b < 0 || a == b) return;
    int value = add_value(net, PW_VALUE_MUTUAL, part->value, index);
    net->value[value].inductor[0] = net->store[a].value;
    net->value[value].inductor[1] = net->store[b].value;
    net->mutual[net->mutuals++] = (pw_mutual){{a, b}, value};
}

static void add_source(pw_net *net, const pw_circuit *circuit)
{
    int in = pw_net_node(net, circuit->input);
    bool resistive = circuit->source_resistance > 0 && isfinite(circuit->source_resistance);
    net->input = in;
    if (circuit->current_input) {
        if (resistive)
            add_entry(net, in, in, 1,
                      add_value(net, PW_VALUE_INVERSE, circuit->source_resistance, -1));
        return;
    }
    int i = net->input = net->unknowns++;
    add_entry(net, in, i, -1, 0);
    add_entry(net, i, in, 1, 0);
    if (resistive)
        add_entry(net, i, i, 1, add_value(net, PW_VALUE_PLAIN, circuit->source_resistance, -1));
}

static void take_room(pw_net *net, int parts)
{
    size_t n = (size_t)parts + 4;
    net->node = pw_arena_take(&net->arena, 5 * n * sizeof *net->node);
    net->node_at = pw_arena_take(&net->arena, 5 * n * sizeof *net->node_at);
    net->entry = pw_arena_take(&net->arena, 10 * n * sizeof *net->entry);
    net->store = pw_arena_take(&net->arena, n * sizeof *net->store);
    net->mutual = pw_arena_take(&net->arena, n * sizeof *net->mutual);
    net->driver = pw_arena_take(&net->arena, n * sizeof *net->driver);
    net->value = pw_arena_take(&net->arena, 4 * n * sizeof *net->value);
}

static void find_nodes(pw_net *net, const pw_circuit *circuit, int *inner)
{
    for (int i = 0; i < circuit->parts; i++) {
        const pw_part *part = &circuit->part[i];
        for (int k = 0; k < pw_circuit_part_nodes(part->kind); k++)
            add_node(net, part->node[k], part->node_at[k]);
    }
    net->no_input = pw_net_node(net, circuit->input) == -2;
    add_node(net, circuit->input, circuit->input_at);
    for (int k = 0; k < 2 && circuit->output[k]; k++) {
        net->no_output |= pw_net_node(net, circuit->output[k]) == -2;
        add_node(net, circuit->output[k], circuit->output_at[k]);
    }
    for (int i = 0; i < circuit->parts; i++)
        inner[i] =
            has_inner_node(&circuit->part[i]) ? add_node(net, NULL, circuit->part[i].at) : -1;
}

void pw_net_make(const pw_circuit *circuit, pw_net *net)
{
    *net = (pw_net){.circuit = circuit};
    take_room(net, circuit->parts);
    int *inner = pw_arena_take(&net->arena, (size_t)(circuit->parts + 1) * sizeof *inner);
    find_nodes(net, circuit, inner);
    net->unknowns = net->nodes;
    add_value(net, PW_VALUE_ONE, 1, -1);
    for (int i = 0; i < circuit->parts; i++) add_part(net, i, inner[i]);
    for (int i = 0; i < circuit->parts; i++)
        if (circuit->part[i].kind == PW_COUPLING) add_coupling(net, i);
    add_source(net, circuit);
    for (int k = 0; k < 2; k++)
        net->output[k] = circuit->output[k] ? pw_net_node(net, circuit->output[k]) : GROUND;
    if (circuit->load.given)
        add_four(net, net->output[0], net->output[1], net->output[0], net->output[1],
                 add_value(net, PW_VALUE_INVERSE, circuit->load.value, -1));
}

void pw_net_free(pw_net *net)
{
    pw_arena_free(&net->arena);
    *net = (pw_net){0};
}

/* ---- The numbers ---- */

static pw_quad decimal(double x)
{
    char text[PW_NUMBER_ROOM];
    return strtof128(pw_shortest(text, x), NULL);
}

void pw_net_values_quad(const pw_net *net, const double *scale, pw_quad *out)
{
    static const pw_quad two_pi = 6.28318530717958647692528676655900577f128;
    for (int i = 0; i < net->values; i++) {
        const pw_value *v = &net->value[i];
        pw_quad x = decimal(v->x);
        if (scale && v->part >= 0) x *= decimal(scale[v->part]);
        switch (v->kind) {
        case PW_VALUE_ONE: out[i] = 1; break;
        case PW_VALUE_PLAIN: out[i] = x; break;
        case PW_VALUE_INVERSE: out[i] = 1 / x; break;
        case PW_VALUE_CYCLE: out[i] = 1 / (two_pi * x); break;
        case PW_VALUE_MUTUAL:
            out[i] = x * sqrtf128(out[v->inductor[0]]) * sqrtf128(out[v->inductor[1]]);
            break;
        }
    }
}

void pw_net_values(const pw_net *net, const double *scale, double *out)
{
    for (int i = 0; i < net->values; i++) {
        const pw_value *v = &net->value[i];
        double x = v->x * (scale && v->part >= 0 ? scale[v->part] : 1);
        switch (v->kind) {
        case PW_VALUE_ONE: out[i] = 1; break;
        case PW_VALUE_PLAIN: out[i] = x; break;
        case PW_VALUE_INVERSE: out[i] = 1 / x; break;
        case PW_VALUE_CYCLE: out[i] = 1 / (2 * M_PI * x); break;
        case PW_VALUE_MUTUAL:
            out[i] = x * sqrt(out[v->inductor[0]] * out[v->inductor[1]]);
            break;
        }
    }
}

/* ---- The reference frequency ---- */

/* The mean of the logarithms of one kind's values; false where there is none. */
static bool mean_log(const pw_circuit *circuit, pw_part_kind kind, double *mean)
{
    int n = 0;
    *mean = 0;
    for (int i = 0; i < circuit->parts; i++)
        if (circuit->part[i].kind == kind) {
            *mean += log(circuit->part[i].value);
            n++;
        }
    if (n) *mean /= n;
    return n > 0;
}

double pw_net_reference(const pw_net *net)
{
    double r, c, l, sum = 0;
    int n = 0;
    bool has_r = mean_log(net->circuit, PW_RESISTOR, &r),
         has_c = mean_log(net->circuit, PW_CAPACITOR, &c);
    bool has_l = mean_log(net->circuit, PW_INDUCTOR, &l);
    if (has_r && has_c) sum -= r + c, n++;
    if (has_r && has_l) sum += r - l, n++;
    if (has_l && has_c) sum -= (l + c) / 2, n++;
    if (!n && has_c) sum -= c + log(1e4), n++;
    return 1.37 * exp(n ? sum / n : log(1e4));
}
