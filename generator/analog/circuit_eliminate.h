/* SPDX-License-Identifier: GPL-3.0-or-later */
/* H at one complex s by elimination, written once for two precisions: the including file defines
 * REAL (the real type), COMPLEX (its complex type), SIZE (|re| + |im| of one) and NAME (of the
 * function made). Method: scaled partial pivoting on the whole equations, zeros skipped.
 *
 *     static bool NAME(const pw_net *net, const REAL *value, COMPLEX s, COMPLEX *out)
 *
 * false where the equations are singular at s. */
#define PASTE2(a, b) a##b
#define PASTE(a, b) PASTE2(a, b)
#define FILL PASTE(NAME, _fill)
#define STORE PASTE(NAME, _store)
#define PIVOT PASTE(NAME, _pivot)

static void STORE(const pw_net *net, COMPLEX *a, int wide, int left, int right, COMPLEX x)
{
    for (int i = 0; i < 2; i++)
        for (int j = 0; j < 2; j++) {
            int row = net->store[left].row[i], column = net->store[right].column[j];
            if (row >= 0 && column >= 0) a[row * wide + column] += i == j ? x : -x;
        }
}

static void FILL(const pw_net *net, const REAL *value, COMPLEX s, COMPLEX *a)
{
    int wide = net->unknowns + 1;
    for (int i = 0; i < net->entries; i++) {
        const pw_entry *e = &net->entry[i];
        a[e->row * wide + e->column] += e->sign * value[e->value];
    }
    for (int i = 0; i < net->stores; i++)
        STORE(net, a, wide, i, i, s * value[net->store[i].value]);
    for (int i = 0; i < net->mutuals; i++) {
        const pw_mutual *m = &net->mutual[i];
        STORE(net, a, wide, m->store[0], m->store[1], s * value[m->value]);
        STORE(net, a, wide, m->store[1], m->store[0], s * value[m->value]);
    }
    a[net->input * wide + wide - 1] = 1;
}

/* Brings the best pivot of column k to row k; false: there is none. */
static bool PIVOT(int n, COMPLEX *a, REAL *scale, int k)
{
    int best = -1, wide = n + 1;
    REAL most = 0;
    for (int i = k; i < n; i++) {
        REAL size = SIZE(a[i * wide + k]) * scale[i];
        if (size > most) {
            most = size;
            best = i;
        }
    }
    if (best < 0) return false;
    for (int j = k; j < wide && best != k; j++) {
        COMPLEX t = a[best * wide + j];
        a[best * wide + j] = a[k * wide + j];
        a[k * wide + j] = t;
    }
    scale[best] = scale[k];
    return true;
}

static bool NAME(const pw_net *net, const REAL *value, COMPLEX s, COMPLEX *out)
{
    int n = net->unknowns, wide = n + 1;
    pw_arena arena = {0};
    COMPLEX *a = pw_arena_take(&arena, (size_t)(n * wide) * sizeof *a), x[PW_MAX_UNKNOWNS];
    REAL scale[PW_MAX_UNKNOWNS];
    bool regular = true;
    FILL(net, value, s, a);
    for (int i = 0; i < n; i++) {
        REAL most = 0;
        for (int j = 0; j < n; j++)
            if (SIZE(a[i * wide + j]) > most) most = SIZE(a[i * wide + j]);
        scale[i] = most > 0 ? 1 / most : 1;
    }
    for (int k = 0; k < n && (regular = PIVOT(n, a, scale, k)); k++)
        for (int i = k + 1; i < n; i++) {
            if (a[i * wide + k] == 0) continue;
            COMPLEX f = a[i * wide + k] / a[k * wide + k];
            for (int j = k + 1; j < wide; j++)
                if (a[k * wide + j] != 0) a[i * wide + j] -= f * a[k * wide + j];
        }
    for (int i = n - 1; i >= 0 && regular; i--) {
        x[i] = a[i * wide + n];
        for (int j = i + 1; j < n; j++)
            if (a[i * wide + j] != 0) x[i] -= a[i * wide + j] * x[j];
        x[i] /= a[i * wide + i];
    }
    if (regular)
        *out = (net->output[0] >= 0 ? x[net->output[0]] : 0)
               - (net->output[1] >= 0 ? x[net->output[1]] : 0);
    pw_arena_free(&arena);
    return regular;
}

#undef FILL
#undef STORE
#undef PIVOT
#undef PASTE
#undef PASTE2
