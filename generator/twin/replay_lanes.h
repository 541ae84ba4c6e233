/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Eight transposed-2 sections in lanes; included once for each format and instruction set, with
 * REAL (float, double), WHOLE (the integer of its size), SIGN (its sign bit), WIDTH (lanes of a
 * vector of the processor), NAME and TARGET set.
 *
 * Lane m-1-k holds section k, so that the last section stands in lane 0, from where a sample is
 * taken at no cost; moving every lane down by one carries outputs to the next section. At step t
 * lane m-1-k computes its sample t - 2 k: two samples behind the one before it, so that the
 * way to the next section is not the longest. First-order sections have b2 = a2 = 0; their s2 is
 * held at -0, since -0 + v = v for every v, signed zeros included.
 * No include guard: it is a template. */

#define PARTS (PW_LANES / WIDTH)
#if WIDTH == 8
#define FOLLOWING {1, 2, 3, 4, 5, 6, 7, 8}
#elif WIDTH == 4
#define FOLLOWING {1, 2, 3, 4}
#else
#define FOLLOWING {1, 2}
#endif
typedef REAL NAME(vector) __attribute__((vector_size(WIDTH * sizeof(REAL))));
typedef WHOLE NAME(mask) __attribute__((vector_size(WIDTH * sizeof(REAL))));

/* What the loop keeps in registers. */
typedef struct NAME(row) { NAME(vector) part[PARTS]; } NAME(row);
typedef struct NAME(bits) { NAME(mask) part[PARTS]; } NAME(bits);

typedef struct NAME(lanes) {
    REAL b0[PW_LANES], b1[PW_LANES], b2[PW_LANES], a1[PW_LANES], a2[PW_LANES];
    REAL s1[PW_LANES], s2[PW_LANES];
    WHOLE keep[PW_LANES], sign[PW_LANES];        /* s2 = (s2 & keep) | sign */
    WHOLE entry[PW_LANES];                       /* all bits in the lane of the first section */
    bool full;                                   /* eight sections, all of second order */
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
    l->full = m == PW_LANES;
    for (int i = 0; i < PW_LANES; i++) l->full = l->full && l->keep[i];
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

static inline __attribute__((always_inline)) TARGET void NAME(get)(void *to, const void *from)
{
    memcpy(to, from, PW_LANES * sizeof(REAL));
}

#define EACH_PART _Pragma("GCC unroll 4") for (int p = 0; p < PARTS; p++)
#define CHOSEN(which, v, w)                                                                        \
    (NAME(vector))(((NAME(mask))(v) & (which)) | ((NAME(mask))(w) & ~(which)))

/* What both steps share, once x_ is there. */
#define LANE_RESULT(HOLD)                                                                          \
    older = y;                                                                                     \
    EACH_PART {                                                                                    \
        y.part[p] = s1.part[p] + b0.part[p] * x_.part[p];                                          \
        next1.part[p] = (s2.part[p] + b1.part[p] * x_.part[p]) - a1.part[p] * y.part[p];           \
        next2.part[p] = b2.part[p] * x_.part[p] - a2.part[p] * y.part[p];                          \
        if (HOLD)                                                                                  \
            next2.part[p] =                                                                        \
                (NAME(vector))(((NAME(mask))next2.part[p] & keep.part[p]) | sign.part[p]);         \
    }

/* One step of all lanes: y from x, and the states that follow. down takes lane i + 1 to lane i. */
#define LANE_STEP(INPUT)                                                                           \
    do {                                                                                           \
        REAL value_ = (INPUT);                                                                     \
        NAME(row) x_;                                                                              \
        EACH_PART {                                                                                \
            NAME(vector) in_ = value_ - (NAME(vector)){0};                                         \
            NAME(vector) next_ = older.part[(p + 1) % PARTS];                                      \
            NAME(vector) moved_ = __builtin_shuffle(older.part[p], next_, down);                   \
            x_.part[p] = CHOSEN(entry.part[p], in_, moved_);                                       \
        }                                                                                          \
        LANE_RESULT(true)                                                                          \
    } while (0)

/* The same where all eight lanes hold second-order sections: the input moves into the last lane. */
#define FULL_STEP(INPUT)                                                                           \
    do {                                                                                           \
        NAME(vector) in_ = {(INPUT)};                                                              \
        NAME(row) x_;                                                                              \
        EACH_PART {                                                                                \
            NAME(vector) next_ = p + 1 < PARTS ? older.part[(p + 1) % PARTS] : in_;                \
            x_.part[p] = __builtin_shuffle(older.part[p], next_, up);                              \
        }                                                                                          \
        LANE_RESULT(false)                                                                         \
    } while (0)

/* The states move where a lane is active only. */
#define IDLE(ACTIVE)                                                                               \
    do {                                                                                           \
        WHOLE active_[PW_LANES] = {0};                                                             \
        NAME(bits) moves_;                                                                         \
        for (int k = 0; k < m; k++) active_[m - 1 - k] = (ACTIVE) ? (WHOLE)-1 : 0;                 \
        NAME(get)(&moves_, active_);                                                               \
        EACH_PART {                                                                                \
            s1.part[p] = CHOSEN(moves_.part[p], next1.part[p], s1.part[p]);                        \
            s2.part[p] = CHOSEN(moves_.part[p], next2.part[p], s2.part[p]);                        \
        }                                                                                          \
    } while (0)

static TARGET void NAME(run)(pw_simulation *sim, int first, int m, REAL *io, size_t n)
{
    static const WHOLE next_lane[] = {1, 2, 3, 4, 5, 6, 7, PARTS == 1 ? 0 : 8};
    NAME(lanes) l;
    NAME(row) b0, b1, b2, a1, a2, s1, s2, next1, next2, older, y = {{{0}}};
    NAME(bits) keep, sign, entry;
    NAME(mask) down;
    const NAME(mask) up = FOLLOWING;
    NAME(load)(sim, first, m, &l);
    NAME(get)(&b0, l.b0), NAME(get)(&b1, l.b1), NAME(get)(&b2, l.b2);
    NAME(get)(&a1, l.a1), NAME(get)(&a2, l.a2);
    NAME(get)(&s1, l.s1), NAME(get)(&s2, l.s2);
    NAME(get)(&keep, l.keep), NAME(get)(&sign, l.sign), NAME(get)(&entry, l.entry);
    memcpy(&down, next_lane, sizeof down);
    older = y;
    const size_t late = 2 * ((size_t)m - 1), filled = n < late ? n : late;
    for (size_t t = 0; t < filled; t++) {
        LANE_STEP(io[t]);
        IDLE(2 * (size_t)k <= t);
    }
    if (l.full)
        for (size_t t = late; t < n; t++) {
            FULL_STEP(io[t]);
            s1 = next1;
            s2 = next2;
            io[t - late] = y.part[0][0];
        }
    else
        for (size_t t = late; t < n; t++) {
            LANE_STEP(io[t]);
            s1 = next1;
            s2 = next2;
            io[t - late] = y.part[0][0];
        }
    for (size_t t = n; t < n + late; t++) {
        LANE_STEP((REAL)0);
        IDLE(t - 2 * (size_t)k < n && 2 * (size_t)k <= t);
        if (t >= late) io[t - late] = y.part[0][0];
    }
    memcpy(l.s1, &s1, sizeof l.s1);
    memcpy(l.s2, &s2, sizeof l.s2);
    NAME(store)(sim, first, m, &l);
}

#undef PARTS
#undef EACH_PART
#undef CHOSEN
#undef LANE_STEP
#undef FULL_STEP
#undef LANE_RESULT
#undef FOLLOWING
#undef IDLE
