/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "twin/fit.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#include <gsl/gsl_blas.h>
#include <gsl/gsl_linalg.h>
#include <gsl/gsl_multifit_nlinear.h>

#include "twin/trial.h"

#define STEP 1e-4                /* of u, for derivatives */
#define NO_DIFFERENCE 1e-6       /* singular values below this of the largest are rounding */
#define SAYS_NOTHING 1.0 /* a combination whose error in u is larger: the tolerance says more */
#define FINEST 1e-5              /* smallest standard error of a point, nepers or radians */
#define MOST_ITERATIONS 200

/* The data, the trial, and the directions that move. */
typedef struct fitting {
    pw_trial trial;
    pw_fit *fit;
    const pw_point **point;
    int rows, residuals;         /* residuals: rows, or two for each */
    bool phases, delay;
    double rate;
    double *log_size, *phase;    /* of the trial */
    double *sigma[2];
} fitting;

/* ---- Residuals ---- */

static double wrapped(double radians) { return radians - 2 * M_PI * round(radians / (2 * M_PI)); }

/* All residuals at u, with the delay in samples. */
static bool residuals_at(fitting *f, const double *u, double delay, double *out)
{
    if (!pw_trial_at(&f->trial, f->fit, u, f->log_size, f->phase)) return false;
    for (int i = 0; i < f->rows; i++) {
        const pw_point *p = f->point[i];
        out[i] = (f->log_size[i] - p->db * M_LN10 / 20) / f->sigma[0][i];
        if (f->phases)
            out[f->rows + i] =
                wrapped(f->phase[i] - 2 * M_PI * p->hz / f->rate * delay - p->deg * M_PI / 180)
                / f->sigma[1][i];
    }
    return true;
}

/* u of the solver's variables: the found directions, then the delay. */
static void place(const fitting *f, const gsl_vector *z, double *u, double *delay)
{
    const pw_fit *fit = f->fit;
    for (int i = 0; i < fit->count; i++) {
        u[i] = 0;
        for (int k = 0; k < fit->found; k++)
            u[i] += fit->direction[k][i] * gsl_vector_get(z, (size_t)k);
    }
    *delay = f->delay ? gsl_vector_get(z, (size_t)fit->found) : 0;
}

static int solve_f(const gsl_vector *z, void *of, gsl_vector *out)
{
    fitting *f = of;
    double u[PW_MOST_FITTED], delay;
    place(f, z, u, &delay);
    return residuals_at(f, u, delay, out->data) ? GSL_SUCCESS : GSL_EDOM;
}

static int solve_df(const gsl_vector *z, void *of, gsl_matrix *out)
{
    fitting *f = of;
    gsl_vector *at = gsl_vector_alloc(z->size), *above = gsl_vector_alloc(out->size1),
               *below = gsl_vector_alloc(out->size1);
    int status = GSL_SUCCESS;
    for (size_t k = 0; k < z->size && !status; k++) {
        gsl_vector_memcpy(at, z);
        gsl_vector_set(at, k, gsl_vector_get(z, k) + STEP);
        status = solve_f(at, f, above);
        gsl_vector_set(at, k, gsl_vector_get(z, k) - STEP);
        if (!status) status = solve_f(at, f, below);
        for (size_t i = 0; i < out->size1 && !status; i++)
            gsl_matrix_set(out, i, k,
                           (gsl_vector_get(above, i) - gsl_vector_get(below, i)) / (2 * STEP));
    }
    gsl_vector_free(at);
    gsl_vector_free(above);
    gsl_vector_free(below);
    return status;
}

/* ---- What can be told apart ---- */

/* Takes from every column what the delay's column could do. */
static void project_out(const fitting *f, gsl_matrix *j)
{
    double dot[PW_MOST_FITTED] = {0}, size = 0;
    if (!f->delay) return;
    for (int i = 0; i < f->rows; i++) {
        double d = f->point[i]->hz / f->sigma[1][i];
        size += d * d;
        for (int k = 0; k < f->fit->count; k++)
            dot[k] += d * gsl_matrix_get(j, (size_t)(f->rows + i), (size_t)k);
    }
    for (int i = 0; i < f->rows; i++)
        for (int k = 0; k < f->fit->count; k++) {
            double *v = gsl_matrix_ptr(j, (size_t)(f->rows + i), (size_t)k);
            *v -= f->point[i]->hz / f->sigma[1][i] * dot[k] / size;
        }
}

static bool sensitivities(fitting *f, gsl_matrix *j)
{
    double u[PW_MOST_FITTED] = {0};
    double *above = pw_arena_take(f->trial.arena, 2 * (size_t)f->residuals * sizeof *above),
           *below = above + f->residuals;
    gsl_matrix_set_zero(j);
    for (int k = 0; k < f->fit->count; k++) {
        u[k] = STEP;
        bool good = residuals_at(f, u, 0, above);
        u[k] = -STEP;
        good = good && residuals_at(f, u, 0, below);
        u[k] = 0;
        if (!good) return false;
        for (int i = 0; i < f->residuals; i++) {
            double d = above[i] - below[i];
            if (i >= f->rows) d = wrapped(d * f->sigma[1][i - f->rows]) / f->sigma[1][i - f->rows];
            gsl_matrix_set(j, (size_t)i, (size_t)k, d / (2 * STEP));
        }
    }
    project_out(f, j);
    return true;
}

/* Singular values (absolute, for points of the errors at hand) and directions. */
static bool decompose(fitting *f, double *singular)
{
    int n = f->fit->count, m = f->residuals < n ? n : f->residuals;
    gsl_matrix *j = gsl_matrix_alloc((size_t)m, (size_t)n),
               *v = gsl_matrix_alloc((size_t)n, (size_t)n);
    gsl_vector *s = gsl_vector_alloc((size_t)n), *work = gsl_vector_alloc((size_t)n);
    bool good = sensitivities(f, j);
    if (good) {
        gsl_linalg_SV_decomp(j, v, s, work);
        for (int k = 0; k < n; k++) {
            singular[k] = gsl_vector_get(s, (size_t)k);
            f->fit->singular[k] = singular[0] > 0 ? singular[k] / singular[0] : 0;
            for (int i = 0; i < n; i++)
                f->fit->direction[k][i] = gsl_matrix_get(v, (size_t)i, (size_t)k);
        }
    }
    gsl_matrix_free(j);
    gsl_matrix_free(v);
    gsl_vector_free(s);
    gsl_vector_free(work);
    return good;
}

/* ---- Solving ---- */

/* Errors of the parameters from the covariance of the solver's variables. */
static void take_errors(fitting *f, const gsl_matrix *covariance, const double *u)
{
    pw_fit *fit = f->fit;
    double c[PW_MOST_FITTED][PW_MOST_FITTED];
    for (int i = 0; i < fit->count; i++)
        for (int j = 0; j < fit->count; j++) {
            c[i][j] = 0;
            for (int k = 0; k < fit->found; k++)
                for (int l = 0; l < fit->found; l++)
                    c[i][j] += fit->direction[k][i] * fit->direction[l][j]
                               * gsl_matrix_get(covariance, (size_t)k, (size_t)l);
        }
    fit->correlation_most = 0;
    for (int i = 0; i < fit->count; i++) {
        pw_fitted *p = &fit->parameter[i];
        p->error = sqrt(fmax(0, c[i][i])) * fabs(pw_trial_slope(p, u[i]));
        p->held = 0;
        for (int k = fit->found; k < fit->count; k++)
            p->held += fit->direction[k][i] * fit->direction[k][i];
        double open = p->nominal * p->tolerance / (p->normal ? 4.5 : sqrt(3));
        if (p->held < 1e-9) p->whole_error = p->error;
        else
            p->whole_error =
                p->kind == PW_FITTED_PART ? sqrt(p->error * p->error + p->held * open * open) : NAN;
        p->at_bound =
            p->kind == PW_FITTED_PART && fabs(p->value / p->nominal - 1) > 0.98 * p->tolerance;
        for (int j = 0; j < i; j++) {
            double r = c[i][i] > 0 && c[j][j] > 0 ? c[i][j] / sqrt(c[i][i] * c[j][j]) : 0;
            if (p->held > 0.01 || fit->parameter[j].held > 0.01 || fabs(r) <= fit->correlation_most)
                continue;
            fit->correlation_most = fabs(r);
            fit->correlated[0] = j, fit->correlated[1] = i;
        }
    }
}

static void take_fit_errors(fitting *f, const double *residual)
{
    double sum = 0, most = 0;
    for (int i = 0; i < f->rows; i++) {
        double db = residual[i] * f->sigma[0][i] * 20 / M_LN10;
        sum += db * db;
        most = fmax(most, fabs(db));
    }
    f->fit->after_db = sqrt(sum / f->rows);
    f->fit->after_most_db = most;
}

/* One solution in the directions that are found; *scatter: residual standard deviation. */
static pw_status solve(fitting *f, double *scatter)
{
    pw_fit *fit = f->fit;
    size_t p = (size_t)(fit->found + f->delay), n = (size_t)f->residuals;
    gsl_multifit_nlinear_parameters options = gsl_multifit_nlinear_default_parameters();
    gsl_multifit_nlinear_fdf problem = {.f = solve_f, .df = solve_df, .n = n, .p = p, .params = f};
    gsl_multifit_nlinear_workspace *w =
        gsl_multifit_nlinear_alloc(gsl_multifit_nlinear_trust, &options, n, p);
    gsl_vector *z = gsl_vector_calloc(p);
    gsl_matrix *covariance = gsl_matrix_alloc(p, p);
    double u[PW_MOST_FITTED], delay, size;
    int why;
    gsl_multifit_nlinear_init(z, &problem, w);
    int status = gsl_multifit_nlinear_driver(MOST_ITERATIONS, 1e-12, 1e-14, 0, NULL, NULL, &why, w);
    place(f, gsl_multifit_nlinear_position(w), u, &delay);
    bool good = (status == GSL_SUCCESS || status == GSL_ENOPROG || status == GSL_EMAXITER)
                && residuals_at(f, u, delay, gsl_multifit_nlinear_residual(w)->data);
    if (good) {
        size = gsl_blas_dnrm2(gsl_multifit_nlinear_residual(w));
        *scatter = size / sqrt((double)(n > p ? n - p : 1));
        gsl_multifit_nlinear_covar(gsl_multifit_nlinear_jac(w), 0, covariance);
        gsl_matrix_scale(covariance, *scatter * *scatter);
        take_errors(f, covariance, u);
        take_fit_errors(f, gsl_multifit_nlinear_residual(w)->data);
        fit->iterations = (int)gsl_multifit_nlinear_niter(w);
        fit->delay_s = delay / f->rate;
    }
    gsl_multifit_nlinear_free(w);
    gsl_vector_free(z);
    gsl_matrix_free(covariance);
    if (good) return PW_OK;
    fputs("polewright: --calibrate: the fit does not converge; the data may be of another stage, "
          "or show too little of this one\n", stderr);
    return PW_FAILED;
}

/* Solves, holds what the data say less of than the tolerances do, and solves again. */
static pw_status solve_all(fitting *f, const double *singular)
{
    pw_fit *fit = f->fit;
    pw_status status;
    do {
        int before = fit->found;
        status = solve(f, &fit->scatter);
        while (!status && fit->found > 1 && fit->scatter > SAYS_NOTHING * singular[fit->found - 1])
            fit->found--;
        if (fit->found == before) break;
    } while (!status);
    return status;
}

/* ---- The whole ---- */

static void take_data(const pw_points *points, pw_arena *arena, fitting *f, double *hz)
{
    f->phases = true;
    f->point = pw_arena_take(arena, (size_t)(points->count + 1) * sizeof *f->point);
    for (int i = 0; i < points->count; i++) {
        const pw_point *p = &points->list[i];
        if (!p->excited || !isfinite(p->db)) continue;
        f->phases = f->phases && isfinite(p->deg);
        hz[f->rows] = p->hz;
        f->point[f->rows++] = p;
    }
    size_t bytes = (size_t)(f->rows + 1) * sizeof(double);
    f->residuals = f->phases ? 2 * f->rows : f->rows;
    f->log_size = pw_arena_take(arena, bytes);
    f->phase = pw_arena_take(arena, bytes);
    for (int k = 0; k < 2; k++) f->sigma[k] = pw_arena_take(arena, bytes);
    for (int i = 0; i < f->rows; i++) {
        double band = f->point[i]->band_db * M_LN10 / 20 / 1.96;
        f->sigma[0][i] = f->sigma[1][i] = band > 0 ? fmax(band, FINEST) : 1;
    }
}

static pw_status fit_data(fitting *f, pw_messages *messages, const double *hz,
                          const pw_results *results, pw_arena *arena)
{
    pw_fit *fit = f->fit;
    double singular[PW_MOST_FITTED], u[PW_MOST_FITTED] = {0};
    pw_status status = pw_trial_begin(results, hz, f->rows, arena, &f->trial, fit, messages);
    if (status) return status;
    double *residual = pw_arena_take(arena, (size_t)(f->residuals + 1) * sizeof *residual);
    if (!decompose(f, singular) || !residuals_at(f, u, 0, residual)) return PW_FAILED;
    take_fit_errors(f, residual);
    fit->before_db = fit->after_db;
    while (fit->found < fit->count && singular[fit->found] > NO_DIFFERENCE * singular[0])
        fit->found++;
    if (!fit->found || f->residuals <= fit->found + f->delay) {
        fprintf(stderr,
                "polewright: --calibrate: %d points are too few to find %d values; expected more "
                "of them\n",
                f->rows, fit->found);
        return PW_WRONG;
    }
    return solve_all(f, singular);
}

pw_status pw_fit_run(const pw_results *results, const pw_points *points, bool delay,
                     pw_arena *arena, pw_fit *out, pw_messages *messages)
{
    fitting f = {.fit = out, .delay = delay, .rate = results->stage->rate_hz};
    memset(out, 0, sizeof *out);
    double *hz = pw_arena_take(arena, (size_t)(points->count + 1) * sizeof *hz);
    take_data(points, arena, &f, hz);
    if (f.rows < 2) {
        fputs("polewright: --calibrate: fewer than two frequencies say anything; expected more\n",
              stderr);
        return PW_WRONG;
    }
    f.delay = delay && f.phases;
    out->delay = f.delay;
    out->points = f.rows;
    pw_status status = fit_data(&f, messages, hz, results, arena);
    pw_trial_end(&f.trial);
    return status;
}
