/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Eight direct-form sections in lanes of 64 bits; included once for each instruction set, with
 * NAME, TARGET, the vector type and its operations set.
 *
 * As replay_lanes.h, but each lane is two samples behind the one before it, because an output takes
 * longer to become the next section's output than to become the same section's next one. Every
 * factor of a product fits 32 bits: words and samples do, and the error e of a shaped section is
 * within 2^a_fraction <= 2^31 (e >= 0) or half of that. Sums may be taken in any order: exact as
 * integers, by the precondition of words/realisation.h.
 * No include guard: it is a template. */

typedef struct NAME(lanes) {
    int64_t b0[PW_LANES], b1[PW_LANES], b2[PW_LANES], a1[PW_LANES], a2[PW_LANES], k1[PW_LANES],
        k2[PW_LANES];
    int64_t x1[PW_LANES], x2[PW_LANES], y1[PW_LANES], y2[PW_LANES], e1[PW_LANES], e2[PW_LANES];
    int64_t right[PW_LANES], left[PW_LANES],
        near[PW_LANES]; /* of the alignment; near: half a unit */
    int64_t fraction[PW_LANES], half[PW_LANES], shaped[PW_LANES];
} NAME(lanes);

static void NAME(load)(const pw_simulation *sim, int first, int m, const pw_word_rules *rules,
                       NAME(lanes) * l)
{
    memset(l, 0, sizeof *l);
    for (int k = 0; k < m; k++) {
        const pw_words *w = &sim->realisation->section[first + k];
        const int64_t *s = sim->state[first + k];
        int i = m - 1 - k, right = w->b_fraction - w->a_fraction;
        bool shaped = w->structure == PW_DIRECT_1_SHAPED;
        l->b0[i] = w->b[0], l->b1[i] = w->b[1], l->b2[i] = w->b[2], l->a1[i] = w->a[1],
        l->a2[i] = w->a[2];
        l->x1[i] = s[0], l->x2[i] = s[1], l->y1[i] = s[2], l->y2[i] = s[3], l->e1[i] = s[4],
        l->e2[i] = s[5];
        l->k1[i] = shaped ? w->k1 : 0, l->k2[i] = shaped ? w->k2 : 0;
        l->shaped[i] = shaped ? -1 : 0;
        l->right[i] = right > 0 ? right : 0;
        l->left[i] = right < 0 ? -right : 0;
        l->near[i] = right > 0 ? INT64_C(1) << (right - 1) : 0;
        l->fraction[i] = w->a_fraction;
        l->half[i] = pw_half(w->a_fraction, rules);
    }
}

static void NAME(store)(pw_simulation *sim, int first, int m, const NAME(lanes) *l)
{
    for (int k = 0; k < m; k++) {
        int64_t *s = sim->state[first + k];
        int i = m - 1 - k;
        s[0] = l->x1[i], s[1] = l->x2[i], s[2] = l->y1[i], s[3] = l->y2[i];
        if (l->shaped[i]) s[4] = l->e1[i], s[5] = l->e2[i];
    }
}

/* shaped: whether any section is (constant at each call, so that plain cascades do not pay). */
static inline __attribute__((always_inline)) TARGET void NAME(loop)(NAME(lanes) * l, int m,
                                                                    const pw_word_rules *rules,
                                                                    bool shaped, bool wrap,
                                                                    int32_t *io, size_t n,
                                                                    uint64_t *clipped)
{
    const VECTOR b0 = GET(l->b0), b1 = GET(l->b1), b2 = GET(l->b2), a1 = GET(l->a1),
                 a2 = GET(l->a2);
    const VECTOR k1 = GET(l->k1), k2 = GET(l->k2), shape = GET(l->shaped);
    const VECTOR right = GET(l->right), left = GET(l->left), near = GET(l->near);
    const VECTOR fraction = GET(l->fraction), half = GET(l->half);
    const VECTOR low = ALL(rules->low), high = ALL(rules->high);
    const int spare = rules->high == INT16_MAX ? 48 : 32;
    VECTOR x1 = GET(l->x1), x2 = GET(l->x2), y1 = GET(l->y1), y2 = GET(l->y2), e1 = GET(l->e1),
           e2 = GET(l->e2);
    VECTOR p1 = ALL(0), p2 = ALL(0), count = ALL(0);
    int64_t entry_lane[PW_LANES] = {0}, active_lane[PW_LANES];
    entry_lane[m - 1] = -1;
    const VECTOR entry = GET(entry_lane);
    const size_t late = 2 * ((size_t)m - 1), total = n + late;
    for (size_t t = 0; t < total; t++) {
        bool whole = t >= late && t < n;
        VECTOR x = PICK(entry, ALL(t < n ? io[t] : 0), DOWN(p2));
        VECTOR p = ADD(ADD(MUL(b0, x), MUL(b1, x1)), MUL(b2, x2));
        p = SHIFT_LEFT(SHIFT_RIGHT(ADD(p, near), right), left);
        VECTOR acc = SUB(SUB(p, MUL(a2, y2)), MUL(a1, y1));
        if (shaped) acc = ADD(acc, ADD(MUL(k1, e1), MUL(k2, e2)));
        VECTOR v = SHIFT_RIGHT(ADD(acc, half), fraction);
        VECTOR y = wrap ? EXTEND(v, spare) : LEAST(MOST(v, low), high);
        VECTOR same = SAME(v, y), e = e1;
        if (shaped) e = AND(AND(SUB(acc, SHIFT_LEFT(v, fraction)), same), shape);
        p2 = p1;
        p1 = y;
        if (whole) {
            count = ADD(count, NOT(same));
            x2 = x1, x1 = x, y2 = y1, y1 = y;
            if (shaped) e2 = e1, e1 = e;
        } else {
            for (int i = 0; i < PW_LANES; i++) active_lane[i] = 0;
            for (int k = 0; k < m; k++)
                active_lane[m - 1 - k] = t >= 2 * (size_t)k && t - 2 * (size_t)k < n ? -1 : 0;
            VECTOR active = GET(active_lane);
            count = ADD(count, AND(NOT(same), active));
            x2 = PICK(active, x1, x2), x1 = PICK(active, x, x1), y2 = PICK(active, y1, y2),
            y1 = PICK(active, y, y1);
            if (shaped) e2 = PICK(active, e1, e2), e1 = PICK(active, e, e1);
        }
        if (t >= late) io[t - late] = FIRST(y);
    }
    PUT(l->x1, x1), PUT(l->x2, x2), PUT(l->y1, y1), PUT(l->y2, y2), PUT(l->e1, e1), PUT(l->e2, e2);
    PUT(active_lane, count);
    for (int i = 0; i < PW_LANES; i++) *clipped += (uint64_t)-active_lane[i];
}

static TARGET void NAME(run)(pw_simulation *sim, int first, int m, int32_t *io, size_t n)
{
    pw_word_rules rules = pw_word_rules_of(sim->realisation);
    NAME(lanes) l;
    bool shaped = false;
    NAME(load)(sim, first, m, &rules, &l);
    for (int i = 0; i < m; i++) shaped |= l.shaped[i] != 0;
    if (rules.wrap) NAME(loop)(&l, m, &rules, true, true, io, n, &sim->clipped);
    else if (shaped) NAME(loop)(&l, m, &rules, true, false, io, n, &sim->clipped);
    else NAME(loop)(&l, m, &rules, false, false, io, n, &sim->clipped);
    NAME(store)(sim, first, m, &l);
}
