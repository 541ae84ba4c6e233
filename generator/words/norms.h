/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Norms of a chain of sections from one source to every node after it, with rigorous bounds. */
#ifndef PW_WORDS_NORMS_H
#define PW_WORDS_NORMS_H

#include <stdbool.h>
#include "discrete/digital.h"

/* One section as an exact linear system. Words of up to 32 bits and doubles are exact here. */
typedef struct pw_line {
    bool coupled;
    long double b[3], a[3];      /* direct: y = b0 x + b1 x1 + b2 x2 - a1 y1 - a2 y2 */
    long double sigma, omega, g1, g2, c1, c2, d;   /* coupled; g2 drives the second word (0 in the
                                                      filter itself, 1 for a rounding source) */
    long double all_pole;        /* >= L1 of 1/A (coupled: of the rotation); INFINITY: integrator */
    long double own;             /* >= L1 of the section from its input to its output */
} pw_line;

/* What was found from the source to one node. */
typedef struct pw_norm {
    long double l1;              /* >= the sum of |h|, at most 0.5 % above it; INFINITY where the
                                    sum does not converge or the chain is too slow to be summed */
    long double l1_low;          /* <= the sum of |h| */
    long double l2;              /* root of the sum of h^2, to 0.5 % */
    long double dc;              /* sum of h, to 0.5 % of l1 */
    long double peak;            /* >= the largest |h| */
} pw_norm;

typedef enum pw_place { PW_PLACE_OUTPUT, PW_PLACE_U1, PW_PLACE_U2, PW_PLACES } pw_place;

/* Fills all_pole from the coefficients. PW_PLACE_U1 and U2 exist for coupled sections only. */
void pw_line_close(pw_line *line);

/* Sums the response of line[0..count) to a unit impulse at its input, all nodes at once;
 * out[k][place] is for section k. own must be set but for line[0] (pw_line_own).
 * Method: the recursion itself in long double; stops when the proven tail of every node is small.
 * The tail of a section is that of its free response from the state it is in, in closed form from
 * its poles, plus its own norm times the tail of its input. Rounding: each step's error is bounded
 * by the terms that were added, and reaches a node through the norms of 1/A; all of it is added
 * outward. Source of the idea: Volkova, Hilaire, Lauter, Reliable evaluation of the worst-case
 * peak gain matrix in multiple precision, ARITH 22, 2015. */
void pw_norms_run(const pw_line *line, int count, pw_norm out[][PW_PLACES]);

/* Sets line->own, by a run over the section alone. */
void pw_line_own(pw_line *line);

#endif
