/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Sections in the type REAL, functions named by NAME(..). Included once for each type by floats.c:
 * the text of both is the same, because C has no templates. */

static REAL NAME(transposed)(const pw_words *w, REAL *s, REAL x)
{
    REAL b0 = (REAL)w->fb[0], b1 = (REAL)w->fb[1], b2 = (REAL)w->fb[2];
    REAL a1 = (REAL)w->fa[1], a2 = (REAL)w->fa[2];
    REAL y = s[S1] + b0 * x;
    if (w->order == 1) {
        s[S1] = b1 * x - a1 * y;
        return y;
    }
    s[S1] = (s[S2] + b1 * x) - a1 * y;
    s[S2] = b2 * x - a2 * y;
    return y;
}

static REAL NAME(direct)(const pw_words *w, REAL *s, REAL x)
{
    REAL b0 = (REAL)w->fb[0], b1 = (REAL)w->fb[1], b2 = (REAL)w->fb[2];
    REAL a1 = (REAL)w->fa[1], a2 = (REAL)w->fa[2];
    REAL y = w->order == 1
        ? b0 * x + b1 * s[X1] - a1 * s[Y1]
        : b0 * x + b1 * s[X1] + b2 * s[X2] - a1 * s[Y1] - a2 * s[Y2];
    s[X2] = s[X1];
    s[X1] = x;
    s[Y2] = s[Y1];
    s[Y1] = y;
    return y;
}

static void NAME(run)(const pw_words *w, double *state, const double *in, double *out, size_t n)
{
    REAL s[4] = {(REAL)state[0], (REAL)state[1], (REAL)state[2], (REAL)state[3]};
    for (size_t i = 0; i < n; i++) {
        REAL x = (REAL)in[i];
        if (w->order == 0) out[i] = (REAL)w->fb[0] * x;
        else if (w->structure == PW_DIRECT_1) out[i] = NAME(direct)(w, s, x);
        else out[i] = NAME(transposed)(w, s, x);
    }
    for (int k = 0; k < 4; k++) state[k] = s[k];
}

static double NAME(settle)(const pw_words *w, double *s, REAL x)
{
    REAL b0 = (REAL)w->fb[0], b1 = (REAL)w->fb[1], b2 = (REAL)w->fb[2];
    REAL a1 = (REAL)w->fa[1], a2 = (REAL)w->fa[2];
    if (w->order == 0) return b0 * x;
    REAL above = w->order == 1 ? b0 + b1 : b0 + b1 + b2;
    REAL below = w->order == 1 ? 1 + a1 : 1 + a1 + a2;
    REAL y = above / below * x;
    if (w->structure == PW_DIRECT_1) {
        s[X1] = s[X2] = x;
        s[Y1] = s[Y2] = y;
        return y;
    }
    s[S1] = y - b0 * x;
    if (w->order == 2) s[S2] = b2 * x - a2 * y;
    return y;
}
