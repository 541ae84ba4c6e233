/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "twin/trial.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#define ROOT_STEP 10.0           /* a frequency, quality or gain moves by exp(u / 10) */

/* ---- Values ---- */

static double inside(double u) { return M_2_PI * atan(M_PI_2 * u); }

static double value_at(const pw_fitted *p, double u)
{
    if (p->kind == PW_FITTED_PART) return p->nominal * (1 + p->tolerance * inside(u));
    return p->nominal * exp(u / ROOT_STEP);
}

double pw_trial_slope(const pw_fitted *p, double u)
{
    if (p->kind != PW_FITTED_PART) return p->value / ROOT_STEP;
    return p->nominal * p->tolerance / (1 + M_PI_2 * u * (M_PI_2 * u));
}

/* ---- Parts ---- */

static const char *key_of(const pw_part *part)
{
    static const char *const key[] = {
        [PW_RESISTOR] = "resistor", [PW_CAPACITOR] = "capacitor", [PW_INDUCTOR] = "inductor",
        [PW_OP_AMP] = "op-amp.gain-bandwidth", [PW_AMPLIFIER] = "amplifier",
        [PW_TRANSCONDUCTOR] = "transconductor", [PW_COUPLING] = "coupling",
    };
    return key[part->kind];
}

/* The path of each circuit of a stage in the order of pw_circuits_of, up to the names of its
 * parts. */
static void circuit_paths(const pw_analog_spec *spec, const char *path, pw_arena *arena,
                          const char **out, bool *cell, int *n)
{
    if (spec->kind == PW_ANALOG_CIRCUIT) {
        cell[*n] = false;
        out[(*n)++] = pw_arena_print(arena, "%s.circuit.parts", path);
    } else if (spec->kind == PW_ANALOG_CELL) {
        cell[*n] = true;
        out[(*n)++] = pw_arena_print(arena, "%s.cell", path);
    } else if (spec->kind == PW_ANALOG_CASCADE)
        for (int i = 0; i < spec->members; i++)
            circuit_paths(&spec->member[i], pw_arena_print(arena, "%s.cascade.%d", path, i + 1),
                          arena, out, cell, n);
}

static pw_status list_parts(pw_trial *t, pw_fit *fit)
{
    int n = 0;
    const char **path = pw_arena_take(t->arena, (size_t)(t->study.circuits + 1) * sizeof *path);
    bool *cell = pw_arena_take(t->arena, (size_t)(t->study.circuits + 1) * sizeof *cell);
    circuit_paths(&t->results->stage->analog, "analog", t->arena, path, cell, &n);
    if (t->study.n > PW_MOST_FITTED) {
        fprintf(stderr, "polewright: --calibrate: %d parts have a tolerance; expected up to %d\n",
                t->study.n, PW_MOST_FITTED);
        return PW_WRONG;
    }
    for (int i = 0; i < t->study.n; i++) {
        const pw_varied *v = &t->study.varied[i];
        const pw_part *part = &t->study.net[v->circuit].circuit->part[v->part];
        double nominal = part->kind == PW_OP_AMP ? part->gain_bandwidth_hz : part->value;
        fit->parameter[fit->count++] = (pw_fitted){
            .kind = PW_FITTED_PART,
            .nominal = nominal,
            .value = nominal,
            .name = n > 1 ? pw_arena_print(t->arena, "%d.%s", v->circuit + 1, part->name)
                          : pw_arena_copy(t->arena, part->name),
            .tolerance = v->tolerance * (v->normal ? 1.5 : 1),
            .normal = v->normal,
            .path = cell[v->circuit]
                        ? pw_arena_print(t->arena, "%s.%s", path[v->circuit], part->name)
                        : pw_arena_print(t->arena, "%s.%s.%s", path[v->circuit], part->name,
                                         key_of(part))};
    }
    return PW_OK;
}

/* ---- Roots ---- */

static void add_parameter(pw_trial *t, pw_fit *fit, pw_fitted p, pw_gain *gain, bool zero)
{
    if (fit->count == PW_MOST_FITTED) return;
    t->gain[fit->count] = gain;
    t->zero[fit->count] = zero;
    p.value = p.nominal;
    fit->parameter[fit->count++] = p;
}

static bool is_pair(const pw_root *r) { return r->double_real || cimag(r->s) != 0; }

static void add_root(pw_trial *t, pw_fit *fit, const char *path, const char *prefix, bool zero,
                     int i, pw_root *r)
{
    const char *what = zero ? "zero" : "pole";
    double size = r->double_real ? sqrt(creal(r->s) * r->s2) : cabs(r->s);
    double damped = r->double_real ? -(creal(r->s) + r->s2) : -2 * creal(r->s);
    const char *at = pw_arena_print(t->arena, "%s.%ss.%d", path, what, i + 1);
    if (size == 0) return;
    add_parameter(t, fit,
                  (pw_fitted){.kind = PW_FITTED_F0,
                              .nominal = size / (2 * M_PI),
                              .path = at,
                              .root = r,
                              .name = pw_arena_print(t->arena, "%s%s %d f0", prefix, what, i + 1)},
                  NULL, zero);
    if (is_pair(r) && damped != 0)
        add_parameter(
            t, fit,
            (pw_fitted){.kind = PW_FITTED_Q,
                        .nominal = size / damped,
                        .path = at,
                        .root = r,
                        .name = pw_arena_print(t->arena, "%s%s %d q", prefix, what, i + 1)},
            NULL, zero);
}

static void list_roots(pw_trial *t, pw_fit *fit, pw_analog_spec *spec, const char *path,
                       const char *prefix)
{
    if (spec->kind == PW_ANALOG_CASCADE)
        for (int i = 0; i < spec->members; i++)
            list_roots(t, fit, &spec->member[i],
                       pw_arena_print(t->arena, "%s.cascade.%d", path, i + 1),
                       pw_arena_print(t->arena, "%s%d.", prefix, i + 1));
    if (spec->kind != PW_ANALOG_ROOTS) return;
    const char *at = pw_arena_print(t->arena, "%s.roots", path);
    for (int i = 0; i < spec->poles; i++) add_root(t, fit, at, prefix, false, i, &spec->pole[i]);
    for (int i = 0; i < spec->zeros; i++) add_root(t, fit, at, prefix, true, i, &spec->zero[i]);
    bool factor = spec->gain.kind == PW_GAIN_FACTOR;
    add_parameter(
        t, fit,
        (pw_fitted){.kind = PW_FITTED_GAIN,
                    .nominal = factor ? spec->gain.factor : spec->gain.is,
                    .path = pw_arena_print(t->arena, "%s.gain.%s", at, factor ? "factor" : "is"),
                    .name = pw_arena_print(t->arena, "%sgain", prefix)},
        &spec->gain, false);
}

static void copy_spec(pw_analog_spec *to, const pw_analog_spec *from, pw_arena *arena)
{
    *to = *from;
    to->pole = pw_arena_take(arena, (size_t)(from->poles + 1) * sizeof *to->pole);
    to->zero = pw_arena_take(arena, (size_t)(from->zeros + 1) * sizeof *to->zero);
    for (int i = 0; i < from->poles; i++) to->pole[i] = from->pole[i];
    for (int i = 0; i < from->zeros; i++) to->zero[i] = from->zero[i];
    to->member = pw_arena_take(arena, (size_t)(from->members + 1) * sizeof *to->member);
    for (int i = 0; i < from->members; i++) copy_spec(&to->member[i], &from->member[i], arena);
}

/* s^2 + (w/q) s + w^2; a negative q puts the pair in the right half plane. */
static void set_pair(pw_root *r, double w, double q)
{
    double d = 1 / (2 * q), a = fabs(d), side = d < 0 ? -1 : 1;
    r->double_real = a >= 1;
    if (a >= 1) {
        double large = w * (a + sqrt((a - 1) * (a + 1)));
        r->s = -side * large;
        r->s2 = -side * w * (w / large);
    } else r->s = CMPLX(-w * d, w * sqrt((1 - d) * (1 + d)));
}

static void set_roots(pw_trial *t, pw_fit *fit)
{
    for (int i = 0; i < fit->count; i++) {
        pw_fitted *p = &fit->parameter[i];
        double w = 2 * M_PI * p->value;
        if (p->kind == PW_FITTED_GAIN) {
            *(t->gain[i]->kind == PW_GAIN_FACTOR ? &t->gain[i]->factor : &t->gain[i]->is) =
                p->value;
        } else if (p->kind == PW_FITTED_F0) {
            bool pair = is_pair(p->root), axis = creal(p->root->s) == 0;
            if (axis) p->root->s = CMPLX(0, w);
            else if (pair) set_pair(p->root, w, fit->parameter[i + 1].value);
            else p->root->s = creal(p->root->s) < 0 ? -w : w;
        }
    }
}

/* ---- Both ---- */

static pw_status nothing(void)
{
    fputs("polewright: --calibrate: nothing may move: expected parts with a tolerance (tolerance: "
          "1 %), or a stage given as "
          "roots\n",
          stderr);
    return PW_WRONG;
}

pw_status pw_trial_begin(const pw_results *results, const double *hz, int rows, pw_arena *arena,
                         pw_trial *out, pw_fit *fit, pw_messages *messages)
{
    pw_circuit_list list;
    *out = (pw_trial){.results = results, .hz = hz, .rows = rows, .arena = arena};
    pw_status status = pw_circuits_of(&results->stage->analog, arena, &list, messages);
    if (status) return status;
    pw_study_begin(results->stage, &list, hz, rows, &out->study);
    out->parts = out->study.n > 0;
    if (!out->parts) {
        out->gain = pw_arena_take(arena, PW_MOST_FITTED * sizeof *out->gain);
        out->zero = pw_arena_take(arena, PW_MOST_FITTED * sizeof *out->zero);
        copy_spec(&out->spec, &results->stage->analog, arena);
        list_roots(out, fit, &out->spec, "analog", "");
        return fit->count ? PW_OK : nothing();
    }
    if (!pw_study_nominal(&out->study)) return PW_FAILED;
    pw_bench_make(&out->study, &out->bench);
    return list_parts(out, fit);
}

static bool parts_at(pw_trial *t, const pw_fit *fit, double *log_size, double *phase)
{
    double x[PW_MOST_FITTED];
    for (int i = 0; i < fit->count; i++)
        x[i] = (fit->parameter[i].value / fit->parameter[i].nominal - 1)
               / t->study.varied[i].tolerance;
    if (!pw_bench_set(&t->bench, x)) return false;
    for (int row = 0; row < t->rows; row++) {
        pw_change change = pw_bench_at(&t->bench, row);
        pw_roots_log_at(&t->results->analog, CMPLX(0, 2 * M_PI * t->hz[row]), &log_size[row],
                        &phase[row]);
        log_size[row] += change.log_ratio;
        phase[row] += change.degrees * M_PI / 180;
    }
    return true;
}

bool pw_trial_at(pw_trial *trial, pw_fit *fit, const double *u, double *log_size, double *phase)
{
    for (int i = 0; i < fit->count; i++)
        fit->parameter[i].value = value_at(&fit->parameter[i], u[i]);
    if (trial->parts) return parts_at(trial, fit, log_size, phase);
    pw_messages unheard = {0};
    pw_roots roots;
    set_roots(trial, fit);
    bool good = !pw_analog_build(&trial->spec, &roots, &unheard);
    for (int row = 0; good && row < trial->rows; row++)
        pw_roots_log_at(&roots, CMPLX(0, 2 * M_PI * trial->hz[row]), &log_size[row], &phase[row]);
    pw_messages_free(&unheard);
    return good;
}

void pw_trial_end(pw_trial *trial)
{
    if (trial->bench.study) pw_bench_free(&trial->bench);
    pw_study_end(&trial->study);
}
