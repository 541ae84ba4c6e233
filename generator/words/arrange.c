/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "words/arrange.h"
#include "words/curves.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>
#include "base/arena.h"

#define STATES 6000              /* most that the search over pairings may meet */
#define SLOTS 16384              /* of the table that finds them */
#define EXACT 12                 /* sections whose order alone is found exactly */

/* What has been placed, and the best way there. */
typedef struct state {
    unsigned mask;               /* pole units */
    unsigned char used[PW_MAX_ROOTS];    /* of each zero group */
    double cost;
    int from;                    /* state before; -1: the start */
    pw_arranged step;
    double noise[PW_MAX_SECTIONS];       /* of a section that ends here with pole unit u */
} state;

typedef struct table {
    const pw_units *units;
    const pw_curves *curves;
    int poles;
    const pw_arranged *pairs;    /* of each pole unit: its zeros are in its curve; null: free */
    double factor;
    state *list;
    int count;
    int slot[SLOTS];
    pw_quick *quick;
} table;

static unsigned hash_of(const table *t, const state *s)
{
    unsigned h = s->mask * 2654435761u;
    for (int g = 0; g < t->units->zeros; g++)
        h = (h ^ s->used[g]) * 16777619u;
    return h ^ h >> 15;
}

/* Any pairing of what has been placed gives the same product: the way that was found first. */
static double chain_l1(const table *t, const state *s, double peak)
{
    pw_arranged step[PW_MAX_SECTIONS];
    pw_quick *quick = t->quick;
    int n = 0;
    double size = peak;
    for (; s->from >= 0; s = &t->list[s->from])
        step[n++] = t->pairs ? t->pairs[s->step.pole] : s->step;
    pw_quick_start(t->units, t->poles, quick);
    while (n-- > 0) {
        pw_section section = pw_units_section(t->units, step[n].pole, step[n].zero[0],
                                              step[n].zero[1]);
        size = pw_quick_add(quick, &section, peak);
    }
    return size;
}

static void evaluate(const table *t, state *s)
{
    float product[PW_CURVE_POINTS] = {0};
    pw_placed placed;
    bool last = s->mask == (1u << t->poles) - 1;
    for (int i = 0; i < t->curves->points; i++) {
        for (int u = 0; u < t->poles; u++)
            product[i] += s->mask >> u & 1 ? t->curves->pole[u][i] : 0;
        for (int g = 0; g < t->units->zeros; g++)
            product[i] += s->used[g] * t->curves->zero[g][i];
    }
    pw_curves_place(t->curves, product, &placed);
    placed.peak = chain_l1(t, s, placed.peak);
    for (int u = 0; u < t->poles; u++)
        if (s->mask >> u & 1)
            s->noise[u] = pw_curves_noise(t->curves, &placed, u, last, t->factor);
}

/* The state equal to this one; new ones are evaluated and added. Null where there is no room. */
static state *enter(table *t, const state *like)
{
    unsigned at = hash_of(t, like) % SLOTS;
    for (; t->slot[at]; at = (at + 1) % SLOTS) {
        state *s = &t->list[t->slot[at] - 1];
        if (s->mask == like->mask && memcmp(s->used, like->used, (size_t)t->units->zeros) == 0)
            return s;
    }
    if (t->count == STATES)
        return NULL;
    state *s = &t->list[t->count++];
    *s = *like;
    s->cost = INFINITY;
    evaluate(t, s);
    t->slot[at] = t->count;
    return s;
}

static bool advance(table *t, int from, pw_arranged step)
{
    state next = t->list[from];
    next.from = from;
    next.step = step;
    next.mask |= 1u << step.pole;
    for (int k = 0; k < 2; k++)
        if (step.zero[k] >= 0)
            next.used[step.zero[k]]++;
    state *s = enter(t, &next);
    if (!s)
        return false;
    double cost = t->list[from].cost + s->noise[step.pole];
    if (cost < s->cost) {
        s->cost = cost;
        s->from = from;
        s->step = step;
    }
    return true;
}

static int left(const table *t, int from, int g)
{
    return t->units->zero[g].count - t->list[from].used[g];
}

/* Every choice of zeros for one pole unit. */
static bool advance_unit(table *t, int from, int u)
{
    const pw_units *units = t->units;
    int size = units->pole[u].size;
    if (t->pairs)
        return advance(t, from, (pw_arranged){u, {-1, -1}});
    for (int g = 0; g < units->zeros; g++) {
        if (left(t, from, g) == 0 || units->zero[g].size > size)
            continue;
        if (units->zero[g].size == size) {
            if (!advance(t, from, (pw_arranged){u, {g, -1}}))
                return false;
            continue;
        }
        for (int h = g; h < units->zeros; h++)
            if (units->zero[h].size == 1 && left(t, from, h) > (h == g)
                && !advance(t, from, (pw_arranged){u, {g, h}}))
                return false;
    }
    return true;
}

static bool explore(table *t)
{
    t->list[0] = (state){.from = -1};
    t->count = 1;
    for (int from = 0; from < t->count; from++)      /* states come in order of their size */
        for (int u = 0; u < t->poles; u++)
            if (!(t->list[from].mask >> u & 1) && !advance_unit(t, from, u))
                return false;
    return true;
}

static bool read_back(const table *t, pw_arranged *order)
{
    int at = t->count - 1, k = t->poles;
    for (int i = 0; i < t->count; i++)
        if (t->list[i].mask == (1u << t->poles) - 1)
            at = i;
    if (t->list[at].mask != (1u << t->poles) - 1)
        return false;
    for (; t->list[at].from >= 0; at = t->list[at].from)
        order[--k] = t->list[at].step;
    return k == 0;
}

static bool search(const pw_units *units, int poles, const pw_arranged *pairs,
                   const pw_curves *curves, double factor,
                   pw_arranged *order)
{
    table *t = pw_take(sizeof *t);
    *t = (table){.units = units, .curves = curves, .poles = poles};
    t->pairs = pairs, t->factor = factor;
    t->list = pw_take(sizeof *t->list * STATES);
    t->quick = pw_take(sizeof *t->quick);
    bool found = explore(t) && read_back(t, order);
    free(t->quick);
    free(t->list);
    free(t);
    return found;
}

bool pw_arrange_all(const pw_units *units, int poles, const pw_arrange_context *context,
                    pw_arranged *order)
{
    pw_curves curves;
    pw_curves_make(units, poles, context, &curves);
    bool found = search(units, poles, NULL, &curves, context->factor, order);
    pw_curves_free(&curves);
    return found;
}

/* ---- the order alone ---- */

/* Adds each pair's zeros to its pole unit's curve, so that no zero is left to choose. */
static void fuse(const pw_arranged *order, int poles, pw_curves *curves)
{
    for (int k = 0; k < poles; k++)
        for (int j = 0; j < 2; j++)
            for (int i = 0; order[k].zero[j] >= 0 && i < curves->points; i++)
                curves->pole[order[k].pole][i] += curves->zero[order[k].zero[j]][i];
}

typedef struct walk {
    const pw_units *units;
    const pw_curves *curves;
    int poles;
    double factor;
} walk;

/* The cost of the first n of an order. */
static double cost_of(const walk *w, const pw_arranged *order, int n)
{
    float product[PW_CURVE_POINTS] = {0};
    double cost = 0;
    pw_placed placed;
    pw_quick quick;
    pw_quick_start(w->units, w->poles, &quick);
    for (int k = 0; k < n; k++) {
        for (int i = 0; i < w->curves->points; i++)
            product[i] += w->curves->pole[order[k].pole][i];
        pw_curves_place(w->curves, product, &placed);
        pw_section section = pw_units_section(w->units, order[k].pole, order[k].zero[0],
                                              order[k].zero[1]);
        placed.peak = pw_quick_add(&quick, &section, placed.peak);
        cost += pw_curves_noise(w->curves, &placed, order[k].pole, k + 1 == w->poles, w->factor);
    }
    return cost;
}

/* Takes one section out and puts it in elsewhere. */
static void move(pw_arranged *order, int from, int to)
{
    pw_arranged moving = order[from];
    for (; from < to; from++)
        order[from] = order[from + 1];
    for (; from > to; from--)
        order[from] = order[from - 1];
    order[to] = moving;
}

static void add_least(const walk *w, pw_arranged *order)
{
    for (int k = 0; k < w->poles; k++) {
        int best = k;
        double least = INFINITY;
        for (int j = k; j < w->poles; j++) {
            move(order, j, k);
            double cost = cost_of(w, order, k + 1);
            move(order, k, j);
            if (cost < least)
                least = cost, best = j;
        }
        move(order, best, k);
    }
}

static double improve(const walk *w, pw_arranged *order)
{
    double cost = cost_of(w, order, w->poles);
    bool moved = true;
    for (int round = 0; moved && round < 4; round++) {
        moved = false;
        for (int from = 0; from < w->poles; from++)
            for (int to = 0; to < w->poles; to++) {
                if (to == from)
                    continue;
                move(order, from, to);
                double now = cost_of(w, order, w->poles);
                if (now < cost * (1 - 1e-9))
                    cost = now, moved = true;
                else
                    move(order, to, from);
            }
    }
    return cost;
}

/* From the order given and from the one that adds least, whichever ends lower. */
static void search_moves(const walk *w, pw_arranged *order)
{
    pw_arranged other[PW_MAX_SECTIONS];
    memcpy(other, order, sizeof *order * (size_t)w->poles);
    double cost = improve(w, order);
    add_least(w, other);
    if (improve(w, other) < cost)
        memcpy(order, other, sizeof *order * (size_t)w->poles);
}

bool pw_arrange_order(const pw_units *units, int poles, const pw_arrange_context *context,
                      pw_arranged *order)
{
    pw_curves curves;
    pw_arranged given[PW_MAX_SECTIONS], found[PW_MAX_SECTIONS];
    bool exact = poles <= EXACT;
    for (int k = 0; k < poles; k++)
        given[order[k].pole] = order[k];
    pw_curves_make(units, poles, context, &curves);
    fuse(order, poles, &curves);
    if (!exact) {
        search_moves(&(walk){units, &curves, poles, context->factor}, order);
    } else if (search(units, poles, given, &curves, context->factor, found)) {
        for (int k = 0; k < poles; k++)
            order[k] = given[found[k].pole];
    }
    pw_curves_free(&curves);
    return exact;
}
