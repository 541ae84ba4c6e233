/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Circuits: parts between nodes -> equations -> poles, zeros and factor.
 *
 * The equations are modified nodal analysis (Ho, Ruehli, Brennan, "The modified nodal approach to
 * network analysis", IEEE Trans. CAS-22, 1975) with nullors for ideal op-amps (Carlin, "Singular
 * network elements", IEEE Trans. CT-11, 1964): (G + s C) x = b u, y = c' x. Every reactive part is
 * one term of C = U D V', so that C never has to be factored. METHODS-circuits.md tells the whole
 * way to the roots. */
#ifndef PW_ANALOG_CIRCUIT_H
#define PW_ANALOG_CIRCUIT_H

#include "analog/model.h"

#define PW_MAX_STORES 128        /* reactive terms of a circuit: C, L, finite op-amps */
#define PW_MAX_UNKNOWNS 400      /* node voltages and branch currents together */

typedef _Float128 pw_quad;

/* A number of the equations: a part's value as the user wrote it in decimal, or made from one. */
typedef enum pw_value_kind {
    PW_VALUE_ONE,                /* 1 */
    PW_VALUE_PLAIN,              /* x */
    PW_VALUE_INVERSE,            /* 1 / x */
    PW_VALUE_CYCLE,              /* 1 / (2 pi x), x in Hz */
    PW_VALUE_MUTUAL              /* x sqrt(L1 L2), L1 and L2 the values of two other numbers */
} pw_value_kind;

typedef struct pw_value {
    pw_value_kind kind;
    double x;
    int part;                    /* whose relative change moves it; -1: none */
    int inductor[2];             /* PW_VALUE_MUTUAL: indices of values */
} pw_value;

typedef struct pw_entry { int row, column, sign, value; } pw_entry;       /* one term of G */
typedef struct pw_store {
    int row[2], column[2], value;
} pw_store; /* D of u = e0 - e1 (rows), v = e0 - e1 (columns); -1: none */
typedef struct pw_mutual {
    int store[2], value;
} pw_mutual; /* two terms off D's diagonal */

typedef struct pw_driver {
    int part, row, drive, plus, minus;
} pw_driver; /* an op-amp's equation; what it drives and senses */

/* The equations of a circuit. Unknowns 0 .. nodes-1 are node voltages, branch currents follow. */
typedef struct pw_net {
    const pw_circuit *circuit;
    int nodes, unknowns;
    const char **node;           /* names */
    pw_where *node_at;           /* where each is first named */
    pw_entry *entry;
    pw_store *store;
    pw_mutual *mutual;
    pw_value *value;
    pw_driver *driver;
    int entries, stores, mutuals, values, drivers;
    int input;                   /* the row that the input drives */
    int output[2];               /* unknowns; -1: ground */
    bool no_input, no_output;    /* the named node is on no part */
    pw_arena arena;
} pw_net;

/* Roots in quadruple precision, before they are rounded into pw_roots. Same order rules. */
typedef struct pw_quad_roots {
    int poles, zeros;
    pw_quad pole_re[PW_MAX_STORES], pole_im[PW_MAX_STORES];
    pw_quad zero_re[PW_MAX_STORES], zero_im[PW_MAX_STORES];
    pw_quad factor;
    int hidden;                                  /* pole-zero pairs that cancel exactly, removed */
    double complex hidden_root[PW_MAX_STORES];
} pw_quad_roots;

typedef enum pw_solved {
    PW_SOLVED, PW_SOLVED_SINGULAR,               /* no unique solution at any frequency */
    PW_SOLVED_NO_TRANSFER,                       /* the output is 0 whatever the input */
    PW_SOLVED_NO_CONVERGENCE
} pw_solved;

/* How many of a part's node[] are nodes. */
int pw_circuit_part_nodes(pw_part_kind kind);

/* The index of a node's voltage among the unknowns; -1 for "ground", -2 where no part names it. */
int pw_net_node(const pw_net *net, const char *name);

/* The equations of a circuit whose parts passed pw_circuit_check. Free in any case. */
void pw_net_make(const pw_circuit *circuit, pw_net *net);
void pw_net_free(pw_net *net);

/* The values of the numbers, scale[part] (null: all 1) times the parts' own. */
void pw_net_values_quad(const pw_net *net, const double *scale, pw_quad *out);
void pw_net_values(const pw_net *net, const double *scale, double *out);

/* rad/s: where the circuit's own frequencies lie, from its parts alone. */
double pw_net_reference(const pw_net *net);

/* Zeros, poles and factor. Method: the pencil is shifted to a real s0 and inverted, so that its
 * eigenvalues are those of an m by m matrix, m reactive terms; exact counts of roots at infinity,
 * at 0, repeated, and common to both come from arithmetic modulo a prime (circuit_exact.h) on the
 * decimal values that the user wrote, and steer the deflation in quadruple precision
 * (circuit_quad.h). Accuracy: relative errors of simple roots about 1e-34 times their condition
 * number times the ratio to s0; nothing here judges a rank by a threshold. */
pw_solved pw_net_solve(const pw_net *net, const double *scale, pw_quad_roots *out);

/* The nodes whose voltages have no unique value; which[node] is set. Their count. */
int pw_net_undetermined(const pw_net *net, bool *which);

/* H at s by elimination of the full equations, extended or quadruple precision. NAN + NAN I where
 * they are singular at s. */
double complex pw_net_response(const pw_net *net, double complex s);
double complex pw_net_response_quad(const pw_net *net, double complex s);

/* The equations at s in extended precision, n rows of n + 1 columns over zeros; the last column is
 * the input's. value: as pw_net_values_quad gives them. */
void pw_net_fill(const pw_net *net, const pw_quad *value, long double complex s,
                 long double complex *a);

/* Largest relative difference between the roots' response and pw_net_response over 200 frequencies
 * and twelve decades about the roots; where the two differ by more than 1e-10 quadruple precision
 * decides. *at_hz: where. Differences more than 600 dB below the largest response do not count. */
double pw_net_compare(const pw_net *net, const pw_roots *roots, double *at_hz);

/* Rounds; false where there are more poles than PW_MAX_ROOTS or the factor leaves the range. */
bool pw_quad_roots_round(const pw_quad_roots *from, pw_roots *to);

/* Messages that need no equations: nodes, islands, feedback, loops of sources, paths. */
void pw_circuit_check(const pw_circuit *circuit, pw_messages *messages);
/* Messages that need the equations: an op-amp whose feedback is positive at DC. */
void pw_circuit_check_feedback(const pw_circuit *circuit, const pw_net *net, pw_messages *messages);

#endif
