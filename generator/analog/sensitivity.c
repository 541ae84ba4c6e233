/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analog/sensitivity.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "analog/cell.h"
#include "analog/sensitivity_adjoint.h"

#define STEP 1e-8               /* relative change of a part */
#define GRID 2000                /* frequencies that are tried for the largest gain */
#define TOGETHER 1e-4            /* real roots this close, relative, are one cluster */

#define TWO_PI 6.28318530717958647692528676655900577L

typedef long double complex long_complex;

/* ---- The circuits of a stage ---- */

static pw_status add_circuits(const pw_analog_spec *spec, pw_arena *arena, pw_circuit_list *out,
                              pw_messages *messages)
{
    pw_status status = PW_OK;
    switch (spec->kind) {
    case PW_ANALOG_CIRCUIT: out->circuit[out->count++] = spec->circuit; break;
    case PW_ANALOG_CELL:
        status = pw_cell_expand(&spec->cell, arena, &out->circuit[out->count++], messages);
        break;
    case PW_ANALOG_CASCADE:
        for (int i = 0; i < spec->members && !status; i++)
            status = add_circuits(&spec->member[i], arena, out, messages);
        break;
    case PW_ANALOG_ROOTS: case PW_ANALOG_POLYNOMIALS: case PW_ANALOG_FAMILY: break;
    }
    return status;
}

static int count_members(const pw_analog_spec *spec)
{
    int n = 1;
    for (int i = 0; spec->kind == PW_ANALOG_CASCADE && i < spec->members; i++)
        n += count_members(&spec->member[i]);
    return n;
}

pw_status pw_circuits_of(const pw_analog_spec *spec, pw_arena *arena, pw_circuit_list *out,
                         pw_messages *messages)
{
    *out = (pw_circuit_list){
        .circuit = pw_arena_take(arena, (size_t)count_members(spec) * sizeof *out->circuit)};
    return add_circuits(spec, arena, out, messages);
}

/* ---- Modes ---- */

static long_complex root_of(const pw_quad_roots *r, bool zero, int i)
{
    return zero ? CMPLXL((long double)r->zero_re[i], (long double)r->zero_im[i])
                : CMPLXL((long double)r->pole_re[i], (long double)r->pole_im[i]);
}

static int count_of(const pw_quad_roots *r, bool zero) { return zero ? r->zeros : r->poles; }

/* f0 and Q of n roots. */
static void measure(const long_complex *root, int n, pw_mode *mode)
{
    long double log_size = 0;
    long_complex sum = 0;
    for (int i = 0; i < n; i++) {
        log_size += logl(cabsl(root[i])) / n;
        sum += root[i];
    }
    long double size = expl(log_size), width = fabsl(creall(sum));
    mode->f0_hz = (double)(size / (TWO_PI));
    mode->q = n != 2 ? (double)NAN : width == 0 ? (double)INFINITY : (double)(size / width);
    mode->tau_s = width == 0 ? (double)INFINITY : (double)(n / width);
}

/* Roots in the order of pw_net_solve: sizes rise, so that a cluster stands together. */
static void find_modes(const pw_quad_roots *r, bool zero, pw_sensitivity *out)
{
    int n = count_of(r, zero);
    for (int i = 0; i < n;) {
        long_complex group[PW_MAX_STORES];
        int count = 1;
        group[0] = root_of(r, zero, i);
        if (cimagl(group[0]) != 0) {
            group[count++] = root_of(r, zero, i + 1);
        } else {
            for (; i + count < n; count++) {
                group[count] = root_of(r, zero, i + count);
                if (cimagl(group[count]) != 0
                    || cabsl(group[count] - group[0]) > TOGETHER * cabsl(group[0])) break;
            }
        }
        i += count;
        if (cabsl(group[0]) == 0 || out->modes == 2 * PW_MAX_ROOTS) continue;
        pw_mode *mode = &out->mode[out->modes++];
        *mode = (pw_mode){.zero = zero, .count = count, .root = (double complex)group[0]};
        measure(group, count, mode);
    }
}

/* The roots of another solution that a mode became: the nearest not yet taken. */
static void follow(const pw_quad_roots *r, const pw_mode *mode, bool *taken, pw_mode *moved)
{
    long_complex group[PW_MAX_STORES];
    int n = count_of(r, mode->zero);
    *moved = (pw_mode){.f0_hz = NAN, .q = NAN};
    for (int k = 0; k < mode->count; k++) {
        long_complex target = k && cimag(mode->root) != 0 ? conj(mode->root) : mode->root;
        int best = -1;
        for (int i = 0; i < n; i++)
            if (!taken[i] && (best < 0 || cabsl(root_of(r, mode->zero, i) - target)
                                              < cabsl(root_of(r, mode->zero, best) - target)))
                best = i;
        if (best < 0) return;
        taken[best] = true;
        group[k] = root_of(r, mode->zero, best);
    }
    measure(group, mode->count, moved);
}

/* ---- Gains ---- */

static long_complex response(const pw_quad_roots *r, long double w)
{
    long_complex h = (long double)r->factor, s = CMPLXL(0, w);
    int n = r->poles > r->zeros ? r->poles : r->zeros;
    for (int i = 0; i < n; i++) {
        if (i < r->poles) h /= s - root_of(r, false, i);
        if (i < r->zeros) h *= s - root_of(r, true, i);
    }
    return h;
}

static int at_origin(const pw_quad_roots *r, bool zero)
{
    int n = 0;
    for (int i = 0; i < count_of(r, zero); i++) n += root_of(r, zero, i) == 0;
    return n;
}

static long double gain_at(const pw_quad_roots *r, double hz)
{
    return cabsl(response(r, TWO_PI * hz));
}

/* Golden section between the neighbours of the largest of a grid, on a logarithmic scale. */
static double refine(const pw_quad_roots *r, double low, double high)
{
    const double part = 0.6180339887498949;
    for (int i = 0; i < 60; i++) {
        double ratio = pow(high / low, part), up = low * ratio, down = high / ratio;
        if (gain_at(r, up) > gain_at(r, down)) low = down;
        else high = up;
    }
    return sqrt(low * high);
}

/* Where the gain is largest, from DC (0) to two decades above the modes; with poles at 0 the middle
 * of the modes. */
static double find_middle(const pw_quad_roots *r, const pw_sensitivity *s)
{
    double low = INFINITY, high = 0, step, best = 0;
    for (int i = 0; i < s->modes; i++) {
        low = fmin(low, s->mode[i].f0_hz);
        high = fmax(high, s->mode[i].f0_hz);
    }
    if (at_origin(r, false)) return s->modes ? sqrt(low * high) : 1e3;
    if (!s->modes) return 0;
    long double most = gain_at(r, 0) * (1 + 1e-9L);
    step = pow(high / low * 1e4, 1.0 / GRID);
    for (int i = 0; i <= GRID; i++) {
        double hz = low / 100 * pow(step, i);
        if (gain_at(r, hz) <= most) continue;
        most = gain_at(r, hz);
        best = hz;
    }
    return best > 0 ? refine(r, best / step, best * step) : 0;
}

static void find_gains(const pw_quad_roots *r, double middle_hz, double *gain)
{
    int origin = at_origin(r, true) - at_origin(r, false);
    long double dc = (long double)r->factor;
    for (int i = 0; i < r->poles || i < r->zeros; i++) {
        if (i < r->poles && root_of(r, false, i) != 0) dc /= cabsl(root_of(r, false, i));
        if (i < r->zeros && root_of(r, true, i) != 0) dc *= cabsl(root_of(r, true, i));
        if (i < r->poles && cimagl(root_of(r, false, i)) == 0 && creall(root_of(r, false, i)) > 0)
            dc = -dc;
        if (i < r->zeros && cimagl(root_of(r, true, i)) == 0 && creall(root_of(r, true, i)) > 0)
            dc = -dc;
    }
    gain[PW_GAIN_DC] = origin > 0 ? 0 : origin < 0 ? (double)INFINITY : (double)dc;
    gain[PW_GAIN_MIDDLE] = (double)cabsl(response(r, TWO_PI * middle_hz));
    gain[PW_GAIN_INFINITY] = r->zeros < r->poles ? 0 : r->zeros > r->poles ? (double)INFINITY
                                                                          : (double)r->factor;
}

/* ---- Parts, by solving again ---- */

static double percent(double before, double after)
{
    return isfinite(before) && before != 0 ? (after / before - 1) / STEP : (double)NAN;
}

static void step_modes(pw_sensitivity *out, int row, const pw_quad_roots *moved)
{
    bool pole_taken[PW_MAX_STORES] = {false}, zero_taken[PW_MAX_STORES] = {false};
    for (int i = 0; i < out->modes; i++) {
        pw_mode now, *mode = &out->mode[i];
        follow(moved, mode, mode->zero ? zero_taken : pole_taken, &now);
        out->move[row * out->modes + i] =
            (pw_moves){percent(mode->f0_hz, now.f0_hz), percent(mode->q, now.q)};
    }
}

static pw_status step_parts(const pw_net *net, pw_arena *arena, pw_sensitivity *out)
{
    double *scale = pw_arena_take(arena, (size_t)(net->circuit->parts + 1) * sizeof *scale);
    pw_quad_roots *moved = pw_arena_take(arena, sizeof *moved);
    for (int i = 0; i < net->circuit->parts; i++) scale[i] = 1;
    for (int row = 0; row < out->parts; row++) {
        scale[out->part[row]] = 1 + STEP;
        if (pw_net_solve(net, scale, moved) != PW_SOLVED) return PW_FAILED;
        scale[out->part[row]] = 1;
        step_modes(out, row, moved);
    }
    return PW_OK;
}

/* ---- Parts, by derivatives ---- */

/* Several roots in one place, alone or with what cancels, have no derivatives. */
static bool all_simple(const pw_sensitivity *s, const pw_quad_roots *roots)
{
    for (int i = 0; i < s->modes; i++) {
        const pw_mode *m = &s->mode[i];
        if (m->count > 1 && cimag(m->root) == 0) return false;
        for (int k = 0; k < roots->hidden; k++)
            if (cabs(roots->hidden_root[k] - m->root) < TOGETHER * cabs(m->root)) return false;
    }
    return true;
}

/* Of a real root or of the upper one of a pair: ln f0 = Re ln s, Q = |s| / (2 |Re s|). */
static bool derive_mode(const pw_net *net, pw_sensitivity *out, int mode, long_complex *move)
{
    const pw_mode *m = &out->mode[mode];
    long_complex s = m->root;
    if (!pw_adjoint_root(net, m->zero, s, move)) return false;
    for (int row = 0; row < out->parts; row++) {
        long_complex ds = move[out->part[row]];
        double f0 = (double)creall(ds / s);
        double q = m->count == 2 && creal(m->root) != 0 ? f0 - (double)(creall(ds) / creall(s))
                                                        : (double)NAN;
        out->move[row * out->modes + mode] = (pw_moves){f0, q};
    }
    return true;
}

static bool derive_modes(const pw_net *net, pw_sensitivity *out, long_complex *move)
{
    for (int i = 0; i < out->modes; i++)
        if (!derive_mode(net, out, i, move)) return false;
    return true;
}

/* DC and infinity are taken far below and above every root, where magnitudes stand to 1e-12. */
static void derive_gains(const pw_net *net, pw_sensitivity *out, long_complex *move)
{
    double low = out->middle_hz > 0 ? out->middle_hz : INFINITY, high = out->middle_hz;
    for (int i = 0; i < out->modes; i++) {
        low = fmin(low, out->mode[i].f0_hz);
        high = fmax(high, out->mode[i].f0_hz);
    }
    if (isinf(low)) low = high = 1;
    double hz[] = {low * 1e-6, fmax(out->middle_hz, low * 1e-6), high * 1e6};
    for (int k = 0; k < PW_GAIN_PLACES; k++) {
        bool there = isfinite(out->gain[k]) && out->gain[k] != 0
                     && pw_adjoint_gain(net, CMPLXL(0, TWO_PI * hz[k]), move);
        for (int row = 0; row < out->parts; row++)
            out->gain_db[row][k] =
                there ? (double)creall(move[out->part[row]]) * 0.2 / M_LN10 : (double)NAN;
    }
}

static bool can_change(const pw_part *part)
{
    return part->kind != PW_OP_AMP || (!part->ideal && part->gain_bandwidth_hz > 0);
}

static pw_status every_part(const pw_net *net, const pw_quad_roots *roots, pw_arena *arena,
                            pw_sensitivity *out)
{
    const pw_circuit *circuit = net->circuit;
    size_t n = (size_t)circuit->parts + 1;
    long_complex *move = pw_arena_take(arena, n * sizeof *move);
    out->part = pw_arena_take(arena, n * sizeof *out->part);
    out->move = pw_arena_take(arena, n * (size_t)(out->modes + 1) * sizeof *out->move);
    out->gain_db = pw_arena_take(arena, n * sizeof *out->gain_db);
    for (int i = 0; i < circuit->parts; i++)
        if (can_change(&circuit->part[i])) out->part[out->parts++] = i;
    derive_gains(net, out, move);
    if (all_simple(out, roots) && derive_modes(net, out, move)) return PW_OK;
    return step_parts(net, arena, out);
}

pw_status pw_sensitivity_compute(const pw_circuit *circuit, pw_arena *arena, pw_sensitivity *out)
{
    pw_net net;
    pw_messages unheard = {0};
    pw_status status = PW_FAILED;
    *out = (pw_sensitivity){.circuit = circuit};
    pw_circuit_check(circuit, &unheard);
    bool wrong = unheard.errors > 0;
    pw_messages_free(&unheard);
    if (wrong) return PW_FAILED;
    pw_net_make(circuit, &net);
    pw_quad_roots *roots = pw_arena_take(arena, sizeof *roots);
    if (pw_net_solve(&net, NULL, roots) == PW_SOLVED) {
        find_modes(roots, false, out);
        find_modes(roots, true, out);
        out->middle_hz = find_middle(roots, out);
        find_gains(roots, out->middle_hz, out->gain);
        status = every_part(&net, roots, arena, out);
    }
    pw_net_free(&net);
    return status;
}
