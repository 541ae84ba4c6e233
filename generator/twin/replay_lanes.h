/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Eight transposed-2 sections in lanes; included once for each format and instruction set, with
 * REAL (float, double), WHOLE (the integer of its size), SIGN (its sign bit), NAME and TARGET set.
 *
 * Lane m-1-k holds section k, so that the last section stands in lane 0, from where a sample is
 * taken at no cost; moving every lane down by one carries outputs to the next section. At step t
 * lane m-1-k computes its sample t - k. First-order sections have b2 = a2 = 0; their s2 is held at
 * -0, since -0 + v = v for every v, signed zeros included.
 * No include guard: it is a template. */

typedef REAL NAME(vector) __attribute__((vector_size(PW_LANES * sizeof(REAL))));
typedef WHOLE NAME(mask) __attribute__((vector_size(PW_LANES * sizeof(REAL))));

typedef struct NAME(lanes) {
    NAME(vector) b0, b1, b2, a1, a2, s1, s2;
    NAME(mask) keep, sign;       /* s2 = (s2 & keep) | sign */
    NAME(mask) entry;            /* all bits in the lane of the first section */
} NAME(lanes);

static TARGET void NAME(load)(const pw_simulation *sim, int first, int m, NAME(lanes) *l)
{
    memset(l, 0, sizeof *l);
    for (int k = 0; k < m; k++) {
        const pw_words *w = &sim->realisation->section[first + k];
        const double *s = sim->fstate[first + k];
        bool second = w->order == 2;
        int lane = m - 1 - k;
        l->b0[lane] = (REAL)w->fb[0];
        l->b1[lane] = w->order ? (REAL)w->fb[1] : 0;
        l->a1[lane] = w->order ? (REAL)w->fa[1] : 0;
        l->b2[lane] = second ? (REAL)w->fb[2] : 0;
        l->a2[lane] = second ? (REAL)w->fa[2] : 0;
        l->s1[lane] = (REAL)s[0];
        l->s2[lane] = second ? (REAL)s[1] : (REAL)-0.0;
        l->keep[lane] = second ? (WHOLE)-1 : 0;
        l->sign[lane] = second ? 0 : SIGN;
    }
    l->entry[m - 1] = (WHOLE)-1;
}

static TARGET void NAME(store)(pw_simulation *sim, int first, int m, const NAME(lanes) *l)
{
    for (int k = 0; k < m; k++) {
        double *s = sim->fstate[first + k];
        int lane = m - 1 - k, order = sim->realisation->section[first + k].order;
        if (order > 0) s[0] = l->s1[lane];
        if (order > 1) s[1] = l->s2[lane];
    }
}

/* One step of lanes whose state may move only where active. */
#define LANE_STEP(INPUT, AFTER)                                                                    \
    do {                                                                                           \
        const NAME(mask) down = {1, 2, 3, 4, 5, 6, 7, 0};                                          \
        REAL value_ = (INPUT);                                                                     \
        NAME(vector) in_ = {value_, value_, value_, value_, value_, value_, value_, value_};       \
        NAME(mask) moved_ = (NAME(mask))__builtin_shuffle(y, down);                                \
        NAME(vector) x = (NAME(vector))(((NAME(mask))in_ & entry) | (moved_ & ~entry));            \
        y = s1 + b0 * x;                                                                           \
        NAME(vector) next1 = (s2 + b1 * x) - a1 * y;                                               \
        NAME(vector) next2 = b2 * x - a2 * y;                                                      \
        next2 = (NAME(vector))(((NAME(mask))next2 & keep) | sign);                                 \
        AFTER                                                                                      \
    } while (0)

static TARGET void NAME(run)(pw_simulation *sim, int first, int m, REAL *io, size_t n)
{
    NAME(lanes) l;
    NAME(load)(sim, first, m, &l);
    const NAME(vector) b0 = l.b0, b1 = l.b1, b2 = l.b2, a1 = l.a1, a2 = l.a2;
    const NAME(mask) keep = l.keep, sign = l.sign, entry = l.entry;
    NAME(vector) s1 = l.s1, s2 = l.s2, y = {0};
    const size_t late = (size_t)m - 1;
    const size_t filled = n < late ? n : late;
#define IDLE(ACTIVE)                                                                               \
    for (int k = 0; k < m; k++) active[m - 1 - k] = (ACTIVE) ? (WHOLE)-1 : 0;                      \
    s1 = (NAME(vector))(((NAME(mask))next1 & active) | ((NAME(mask))s1 & ~active));                \
    s2 = (NAME(vector))(((NAME(mask))next2 & active) | ((NAME(mask))s2 & ~active));
    for (size_t t = 0; t < filled; t++) {
        NAME(mask) active = {0};
        LANE_STEP(io[t], IDLE((size_t)k <= t));
    }
    for (size_t t = late; t < n; t++) {
        LANE_STEP(io[t], s1 = next1; s2 = next2;);
        io[t - late] = y[0];
    }
    for (size_t t = n; t < n + late; t++) {
        NAME(mask) active = {0};
        LANE_STEP((REAL)0, IDLE(t - (size_t)k < n && (size_t)k <= t));
        if (t >= late) io[t - late] = y[0];
    }
#undef IDLE
    l.s1 = s1;
    l.s2 = s2;
    NAME(store)(sim, first, m, &l);
}

#undef LANE_STEP
