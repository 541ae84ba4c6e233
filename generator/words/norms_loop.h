/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The recursions of norms.c, for one type of number: REAL, with names made by NAME. No guard: it is
 * included once for each. The block is summed on its own, so that its sum rounds little. */

static void NAME(run_direct)(const pw_line *s, runner *r, REAL *v, int n)
{
    REAL b0 = (REAL)s->b[0], b1 = (REAL)s->b[1], b2 = (REAL)s->b[2];
    REAL a1 = (REAL)s->a[1], a2 = (REAL)s->a[2];
    REAL x1 = (REAL)r->x1, x2 = (REAL)r->x2, y1 = (REAL)r->y1, y2 = (REAL)r->y2;
    for (int i = 0; i < n; i++) {
        REAL y = (b0 * v[i] + b1 * x1 + b2 * x2 - a2 * y2) - a1 * y1;
        x2 = x1, x1 = v[i], y2 = y1, y1 = y, v[i] = y;
    }
    r->x1 = x1, r->x2 = x2, r->y1 = y1, r->y2 = y2;
    NAME(tally)(r, PW_PLACE_OUTPUT, v, n);
}

static void NAME(run_coupled)(const pw_line *s, runner *r, REAL *v, int n)
{
    REAL sigma = (REAL)s->sigma, omega = (REAL)s->omega, g1 = (REAL)s->g1, g2 = (REAL)s->g2;
    REAL c1 = (REAL)s->c1, c2 = (REAL)s->c2, d = (REAL)s->d, u1 = (REAL)r->y1, u2 = (REAL)r->y2;
    REAL first[BLOCK], second[BLOCK];
    for (int i = 0; i < n; i++) {
        REAL y = c1 * u1 + c2 * u2 + d * v[i];
        first[i] = (g1 * v[i] - omega * u2) + sigma * u1;
        second[i] = (g2 * v[i] + omega * u1) + sigma * u2;
        u1 = first[i], u2 = second[i], v[i] = y;
    }
    r->y1 = u1, r->y2 = u2;
    NAME(tally)(r, PW_PLACE_OUTPUT, v, n);
    NAME(tally)(r, PW_PLACE_U1, first, n);
    NAME(tally)(r, PW_PLACE_U2, second, n);
}
