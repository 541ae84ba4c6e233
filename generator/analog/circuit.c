/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A circuit as an analog model: checks, equations, roots, proof. */
#include "analog/circuit.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/text.h"

#define AGREEMENT 1e-8           /* roots against the direct solve, relative */

/* The equations have no single solution although every simple check passed: names the nodes. */
static void tell_singular(const pw_net *net, pw_messages *messages)
{
    bool which[PW_MAX_UNKNOWNS] = {false};
    int count = pw_net_undetermined(net, which);
    for (int i = 0; i < net->nodes; i++)
        if (which[i])
            pw_error(messages, net->node_at[i], "the voltage of node '%s' is not determined by the "
                     "circuit; expected one solution (an op-amp that drives its own inputs, and a "
                     "path for every node's current)", net->node[i]);
    if (!count)
        pw_error(
            messages, net->circuit->at,
            "the circuit contradicts itself: its equations have no "
            "solution; expected no loop of ideal sources and op-amps that can set their inputs");
}

static void tell_hidden(const pw_net *net, const pw_quad_roots *roots, pw_messages *messages)
{
    char hz[PW_NUMBER_ROOM];
    for (int i = 0; i < roots->hidden; i++) {
        double complex s = roots->hidden_root[i];
        if (cimag(s) < 0) continue;
        pw_si(hz, cabs(s) / (2 * M_PI), "Hz", 4);
        pw_warning(messages, net->circuit->at, "a %s at %s cancels a zero exactly and is left out: "
                   "this part of the circuit is not seen from input to output",
                   cimag(s) != 0 ? "pair of poles" : "pole", hz);
    }
}

static pw_status tell_count(const pw_net *net, const pw_quad_roots *roots, pw_messages *messages)
{
    if (roots->poles <= PW_MAX_ROOTS && roots->zeros <= PW_MAX_ROOTS) return PW_OK;
    pw_error(messages, net->circuit->at,
             "the circuit has %d poles and %d zeros; expected at most %d "
             "of each",
             roots->poles, roots->zeros, PW_MAX_ROOTS);
    return PW_WRONG;
}

/* The roots, rounded, must give back what the equations say. */
static pw_status prove(const pw_net *net, const pw_roots *roots, pw_messages *messages)
{
    double at_hz, worst = pw_net_compare(net, roots, &at_hz);
    char hz[PW_NUMBER_ROOM];
    if (worst <= AGREEMENT) return PW_OK;
    pw_error(messages, net->circuit->at, "the poles and zeros found do not reproduce the circuit's "
             "response: they differ by %.1e of it at %s; expected %.0e or less (part values closer "
             "together, or the stage as a cascade)", worst, pw_si(hz, at_hz, "Hz", 4), AGREEMENT);
    return PW_FAILED;
}

static pw_status solve(const pw_net *net, pw_roots *out, pw_quad_roots *roots,
                       pw_messages *messages)
{
    pw_status status;
    switch (pw_net_solve(net, NULL, roots)) {
    case PW_SOLVED: break;
    case PW_SOLVED_SINGULAR:
        tell_singular(net, messages);
        return PW_WRONG;
    case PW_SOLVED_NO_TRANSFER:
        pw_error(messages, net->circuit->output_at[0],
                 "the output is 0 whatever the input: no path "
                 "leads from the input to it, or it is held at ground; expected a node that the "
                 "input moves");
        return PW_WRONG;
    case PW_SOLVED_NO_CONVERGENCE:
        pw_error(messages, net->circuit->at, "the search for the circuit's poles and zeros did not "
                 "converge; expected part values closer together, or the stage as a cascade");
        return PW_FAILED;
    }
    tell_hidden(net, roots, messages);
    status = tell_count(net, roots, messages);
    if (status) return status;
    if (!pw_quad_roots_round(roots, out)) {
        pw_error(messages, net->circuit->at, "the circuit's gain factor is beyond the numbers; "
                 "expected a stage of fewer or slower poles");
        return PW_FAILED;
    }
    return prove(net, out, messages);
}

pw_status pw_analog_from_circuit(const pw_circuit *circuit, pw_roots *out, pw_messages *messages)
{
    int before = messages->errors;
    *out = (pw_roots){0};
    pw_circuit_check(circuit, messages);
    if (messages->errors > before) return PW_WRONG;
    pw_net net;
    pw_net_make(circuit, &net);
    pw_quad_roots *roots = pw_take(sizeof *roots);
    pw_status status = solve(&net, out, roots, messages);
    if (!status) pw_circuit_check_feedback(circuit, &net, messages);
    free(roots);
    pw_net_free(&net);
    return status;
}
