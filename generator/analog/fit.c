/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analog/wide.h"
#include "analog/polynomial.h"

#include <stdlib.h>
#include <string.h>

#define N PW_MAX_ROOTS
#define ROUNDS 20

/* p, of degree *n, times (s + c) or (s^2 + b s + c); highest power first. */
static void times(pw_wide *p, int *n, bool pair, pw_wide b, pw_wide c)
{
    int degree = *n + (pair ? 2 : 1);
    for (int i = *n + 1; i <= degree; i++)
        p[i] = 0;
    for (int i = degree; i >= 1; i--) {
        p[i] += (pair ? b : c) * p[i - 1];
        if (pair && i >= 2)
            p[i] += c * p[i - 2];
    }
    *n = degree;
}

/* The product of all factors, without one power of the factor skip (-1: of none). Returns the
 * degree. */
static int product(const pw_factor *factor, int factors, int skip, pw_wide *p)
{
    int n = 0;
    p[0] = 1;
    for (int k = 0; k < factors; k++)
        for (int m = k == skip; m < factor[k].multiplicity; m++)
            times(p, &n, factor[k].pair, factor[k].b, factor[k].c);
    return n;
}

/* The coefficients of prod(s + |root|): what each coefficient would be without cancellation. */
static void weights(const pw_factor *factor, int factors, pw_wide *p)
{
    int n = 0;
    p[0] = 1;
    for (int k = 0; k < factors; k++)
        for (int m = 0; m < factor[k].multiplicity; m++) {
            pw_wide c = factor[k].c;
            if (factor[k].pair)
                times(p, &n, true, 2 * sqrtf128(c), c);
            else
                times(p, &n, false, 0, fabsf128(c));
        }
}

/* Least squares by Householder reflections: rows x columns, rows >= columns, the right side in
 * column `columns` of each row; x gets the solution, 0 for a column that depends on others. */
static void least_squares(pw_wide (*a)[N + 1], int rows, int columns, pw_wide *x)
{
    for (int k = 0; k < columns; k++) {
        pw_wide norm = 0;
        for (int i = k; i < rows; i++)
            norm += a[i][k] * a[i][k];
        norm = copysignf128(sqrtf128(norm), a[k][k]);
        if (norm == 0)
            continue;
        pw_wide head = a[k][k] + norm;
        for (int j = k + 1; j <= columns; j++) {
            pw_wide dot = head * a[k][j];
            for (int i = k + 1; i < rows; i++)
                dot += a[i][k] * a[i][j];
            dot /= head * norm;
            a[k][j] -= dot * head;
            for (int i = k + 1; i < rows; i++)
                a[i][j] -= dot * a[i][k];
        }
        a[k][k] = -norm;
    }
    for (int k = columns - 1; k >= 0; k--) {
        pw_wide sum = a[k][columns];
        for (int j = k + 1; j < columns; j++)
            sum -= a[k][j] * x[j];
        x[k] = a[k][k] == 0 ? 0 : sum / a[k][k];
    }
}

/* The columns of one factor: d(product)/d(c) and, for a free pair, d(product)/d(b), both for
 * relative steps (c by c, b by sqrt(c)). Returns the next column. */
static int derive(const pw_factor *factor, int factors, int k, const pw_wide *weight, int n,
                  pw_wide (*a)[N + 1], int column)
{
    pw_wide rest[N + 1];
    const pw_factor *f = &factor[k];
    int degree = product(factor, factors, k, rest);
    for (int i = 1; i <= n; i++)
        a[i - 1][column] = i < n - degree ? 0
                         : f->multiplicity * f->c * rest[i - (n - degree)] / weight[i];
    column++;
    if (!f->pair || f->axis)
        return column;
    for (int i = 1; i <= n; i++)
        a[i - 1][column] = i > degree + 1 ? 0
                         : f->multiplicity * sqrtf128(f->c) * rest[i - 1] / weight[i];
    return column + 1;
}

/* Takes the step; the largest relative change is returned. */
static pw_wide move(pw_factor *factor, int factors, const pw_wide *x)
{
    pw_wide most = 0;
    int column = 0;
    for (int k = 0; k < factors; k++) {
        pw_wide scale = sqrtf128(fabsf128(factor[k].c)), by = x[column++];
        factor[k].c += by * factor[k].c;
        most = fmaxf128(most, fabsf128(by));
        if (factor[k].pair && !factor[k].axis) {
            factor[k].b += scale * x[column];
            most = fmaxf128(most, fabsf128(x[column++]));
        }
    }
    return most;
}

/* Whether every factor still is what it says: complex roots in a pair, nothing at 0. */
static bool sound(const pw_factor *factor, int factors)
{
    for (int k = 0; k < factors; k++) {
        pw_wide b = factor[k].b, c = factor[k].c;
        if (!isfinite(c) || c == 0 || (factor[k].pair && !(c - b * b / 4 > 0)))
            return false;
    }
    return true;
}

/* The weighted residuals into the right side of a; the largest is returned. */
static pw_wide residuals(const pw_wide *c, int n, const pw_factor *factor, int factors,
                         const pw_wide *weight, int columns, pw_wide (*a)[N + 1])
{
    pw_wide p[N + 1], most = 0;
    product(factor, factors, -1, p);
    for (int i = 1; i <= n; i++) {
        pw_wide off = (c[i] / c[0] - p[i]) / weight[i];
        a[i - 1][columns] = off;
        most = fmaxf128(most, fabsf128(off));
    }
    return most;
}

pw_wide pw_factors_fit(const pw_wide *c, int n, pw_factor *factor, int factors)
{
    pw_wide (*a)[N + 1] = pw_take(sizeof *a * N), weight[N + 1], x[N], most = INFINITY;
    bool good = true;
    for (int round = 0; round < ROUNDS && good; round++) {
        int columns = 0;
        weights(factor, factors, weight);
        for (int k = 0; k < factors; k++)
            columns = derive(factor, factors, k, weight, n, a, columns);
        residuals(c, n, factor, factors, weight, columns, a);
        least_squares(a, n, columns, x);
        pw_wide moved = move(factor, factors, x);
        good = sound(factor, factors);
        if (moved < 1e-28F128)
            break;
    }
    if (good) {
        weights(factor, factors, weight);
        most = residuals(c, n, factor, factors, weight, 0, a);
    }
    free(a);
    return most;
}
