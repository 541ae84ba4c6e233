/* SPDX-License-Identifier: GPL-3.0-or-later */
#define __STDC_WANT_IEC_60559_TYPES_EXT__ 1      /* sqrtf128 */
#include "analog/circuit_quad.h"

#include <math.h>
#include <string.h>

#define A(i, j) a[(i) * n + (j)]

static pw_quad absolute(pw_quad x) { return x < 0 ? -x : x; }

/* ---- LU ---- */

static int find_pivot(int n, const pw_quad *a, const pw_quad *row_scale, int k)
{
    int best = -1;
    pw_quad most = 0;
    for (int i = k; i < n; i++) {
        pw_quad size = absolute(A(i, k)) * row_scale[i];
        if (size > most) {
            most = size;
            best = i;
        }
    }
    return best;
}

static void swap_rows(int n, pw_quad *a, int i, int k)
{
    for (int j = 0; j < n && i != k; j++) {
        pw_quad t = A(i, j);
        A(i, j) = A(k, j);
        A(k, j) = t;
    }
}

bool pw_quad_lu(int n, pw_quad *a, int *pivot)
{
    pw_quad row_scale[PW_MAX_UNKNOWNS + 1];
    for (int i = 0; i < n; i++) {
        pw_quad most = 0;
        for (int j = 0; j < n; j++)
            if (absolute(A(i, j)) > most) most = absolute(A(i, j));
        if (most == 0) return false;
        row_scale[i] = 1 / most;
    }
    for (int k = 0; k < n; k++) {
        int p = find_pivot(n, a, row_scale, k);
        if (p < 0) return false;
        pivot[k] = p;
        swap_rows(n, a, p, k);
        row_scale[p] = row_scale[k];
        for (int i = k + 1; i < n; i++) {
            if (A(i, k) == 0) continue;
            pw_quad f = A(i, k) /= A(k, k);
            for (int j = k + 1; j < n; j++)
                if (A(k, j) != 0) A(i, j) -= f * A(k, j);
        }
    }
    return true;
}

void pw_quad_lu_solve(int n, const pw_quad *a, const int *pivot, pw_quad *x)
{
    for (int k = 0; k < n; k++) {
        pw_quad t = x[pivot[k]];
        x[pivot[k]] = x[k];
        x[k] = t;
    }
    for (int i = 0; i < n; i++)
        for (int j = 0; j < i; j++)
            if (A(i, j) != 0 && x[j] != 0) x[i] -= A(i, j) * x[j];
    for (int i = n - 1; i >= 0; i--) {
        for (int j = i + 1; j < n; j++)
            if (A(i, j) != 0 && x[j] != 0) x[i] -= A(i, j) * x[j];
        x[i] /= A(i, i);
    }
}

/* ---- Householder reflections ---- */

/* The reflection I - beta v v' that takes x to a multiple of e0; v replaces x. beta 0: none. */
static pw_quad reflector(int n, pw_quad *x)
{
    pw_quad most = 0, sum = 0;
    for (int i = 0; i < n; i++)
        if (absolute(x[i]) > most) most = absolute(x[i]);
    if (most == 0) return 0;
    for (int i = 0; i < n; i++) {
        x[i] /= most;
        sum += x[i] * x[i];
    }
    pw_quad norm = sqrtf128(sum);
    if (x[0] > 0) norm = -norm;
    x[0] -= norm;
    pw_quad rest = -norm * x[0];
    return rest == 0 ? 0 : 1 / rest;
}

/* Rows first .. first+n-1, columns from .. to-1 of a matrix of this stride. */
static void reflect_rows(pw_quad *a, int stride, int first, int n, int from, int to,
                         const pw_quad *v, pw_quad beta)
{
    for (int j = from; j < to && beta != 0; j++) {
        pw_quad dot = 0;
        for (int i = 0; i < n; i++) dot += v[i] * a[(first + i) * stride + j];
        dot *= beta;
        for (int i = 0; i < n; i++) a[(first + i) * stride + j] -= dot * v[i];
    }
}

static void reflect_columns(pw_quad *a, int stride, int first, int n, int from, int to,
                            const pw_quad *v, pw_quad beta)
{
    for (int i = from; i < to && beta != 0; i++) {
        pw_quad dot = 0, *row = a + i * stride + first;
        for (int j = 0; j < n; j++) dot += v[j] * row[j];
        dot *= beta;
        for (int j = 0; j < n; j++) row[j] -= dot * v[j];
    }
}

/* ---- Deflation ---- */

static int longest_column(const pw_quad *a, int n, int k, pw_quad *column)
{
    int best = k;
    pw_quad most = -1;
    for (int j = k; j < n; j++) {
        pw_quad sum = 0;
        for (int i = k; i < n; i++) sum += A(i, j) * A(i, j);
        if (sum > most) {
            most = sum;
            best = j;
        }
    }
    for (int i = k; i < n; i++) column[i - k] = A(i, best);
    return best;
}

void pw_quad_deflate(int n, int lost, pw_quad *matrix)
{
    static const size_t size = sizeof(pw_quad);
    pw_arena arena = {0};
    pw_quad *a = pw_arena_take(&arena, (size_t)(n * n) * size);
    pw_quad v[PW_MAX_STORES];
    for (int i = 0; i < n; i++)
        for (int j = 0; j < n; j++) A(i, j) = matrix[j * n + i];
    for (int k = 0; k < n - lost; k++) {
        int p = longest_column(a, n, k, v);
        for (int i = 0; i < n; i++) {
            pw_quad t = A(i, p);
            A(i, p) = A(i, k);
            A(i, k) = t;
        }
        pw_quad beta = reflector(n - k, v);
        reflect_rows(a, n, k, n - k, k, n, v, beta);
        reflect_rows(matrix, n, k, n - k, 0, n, v, beta);
        reflect_columns(matrix, n, k, n - k, 0, n, v, beta);
    }
    int left = n - lost;
    for (int i = 0; i < left; i++)
        for (int j = 0; j < left; j++) matrix[i * left + j] = matrix[i * n + j];
    pw_arena_free(&arena);
}

/* ---- Eigenvalues ---- */

static bool balance_one(int n, pw_quad *a, int k)
{
    pw_quad column = 0, row = 0, f = 1;
    for (int j = 0; j < n; j++) {
        if (j == k) continue;
        column += absolute(A(j, k));
        row += absolute(A(k, j));
    }
    if (column == 0 || row == 0) return false;
    pw_quad sum = column + row;
    for (; column < row / 2; column *= 4) f *= 2;
    for (; column > row * 2; column /= 4) f /= 2;
    if ((column + row) / f >= 0.95f128 * sum) return false;
    for (int j = 0; j < n; j++) A(k, j) /= f;
    for (int j = 0; j < n; j++) A(j, k) *= f;
    return true;
}

static void balance(int n, pw_quad *a)
{
    bool changed = true;
    for (int pass = 0; changed && pass < 200; pass++) {
        changed = false;
        for (int k = 0; k < n; k++) changed |= balance_one(n, a, k);
    }
}

static void hessenberg(int n, pw_quad *a)
{
    pw_quad v[PW_MAX_STORES];
    for (int k = 0; k + 2 < n; k++) {
        for (int i = k + 1; i < n; i++) v[i - k - 1] = A(i, k);
        pw_quad beta = reflector(n - k - 1, v);
        reflect_rows(a, n, k + 1, n - k - 1, k, n, v, beta);
        reflect_columns(a, n, k + 1, n - k - 1, 0, n, v, beta);
        for (int i = k + 2; i < n; i++) A(i, k) = 0;
    }
}

/* The two eigenvalues of the block at rows k, k+1, without cancellation for real ones. */
static void two_roots(int n, const pw_quad *a, int k, pw_quad *re, pw_quad *im)
{
    pw_quad half = (A(k, k) - A(k + 1, k + 1)) / 2, cross = A(k, k + 1) * A(k + 1, k);
    pw_quad square = half * half + cross;
    re[k] = re[k + 1] = (A(k, k) + A(k + 1, k + 1)) / 2;
    im[k] = im[k + 1] = 0;
    if (square < 0) {
        im[k] = sqrtf128(-square);
        im[k + 1] = -im[k];
        return;
    }
    pw_quad z = half + (half < 0 ? -sqrtf128(square) : sqrtf128(square));
    re[k] = A(k + 1, k + 1) + z;
    re[k + 1] = z == 0 ? re[k] : A(k + 1, k + 1) - cross / z;
}

/* Where the active block that ends at row high begins: the first negligible subdiagonal above. */
static int block_start(int n, pw_quad *a, int high)
{
    int low = high;
    for (; low > 0; low--) {
        pw_quad size = absolute(A(low, low)) + absolute(A(low - 1, low - 1));
        if (absolute(A(low, low - 1)) <= PW_QUAD_EPSILON * size) {
            A(low, low - 1) = 0;
            break;
        }
        if (size == 0 && A(low, low - 1) == 0) break;
    }
    return low;
}

/* First column of (H - s1)(H - s2), the shifts given by their sum and product. */
static void first_column(int n, const pw_quad *a, int low, pw_quad sum, pw_quad product, pw_quad *v)
{
    v[0] = A(low, low) * (A(low, low) - sum) + A(low, low + 1) * A(low + 1, low) + product;
    v[1] = A(low + 1, low) * (A(low, low) + A(low + 1, low + 1) - sum);
    v[2] = A(low + 1, low) * A(low + 2, low + 1);
}

static void francis_sweep(int n, pw_quad *a, int low, int high, bool exceptional)
{
    pw_quad sum = A(high, high) + A(high - 1, high - 1), v[3];
    pw_quad product = A(high, high) * A(high - 1, high - 1) - A(high, high - 1) * A(high - 1, high);
    if (exceptional) {
        pw_quad size = absolute(A(high, high - 1)) + absolute(A(high - 1, high - 2));
        sum = 1.5f128 * size;
        product = size * size;
    }
    first_column(n, a, low, sum, product, v);
    for (int k = low; k < high; k++) {
        int rows = k + 2 <= high ? 3 : 2;
        pw_quad beta = reflector(rows, v);
        int from = k > low ? k - 1 : low, to = k + 4 <= high + 1 ? k + 4 : high + 1;
        reflect_rows(a, n, k, rows, from, high + 1, v, beta);
        reflect_columns(a, n, k, rows, low, to, v, beta);
        if (k > low)
            for (int i = k + 1; i < k + rows; i++) A(i, k - 1) = 0;
        for (int i = 0; i < 3; i++) v[i] = k + 1 + i <= high ? A(k + 1 + i, k) : 0;
    }
}

bool pw_quad_eigenvalues(int n, pw_quad *a, pw_quad *re, pw_quad *im)
{
    balance(n, a);
    hessenberg(n, a);
    int sweeps = 0;
    for (int high = n - 1; high >= 0;) {
        int low = block_start(n, a, high);
        if (low == high) {
            re[high] = A(high, high);
            im[high] = 0;
        } else if (low == high - 1) {
            two_roots(n, a, low, re, im);
        } else {
            if (++sweeps > 60) return false;
            francis_sweep(n, a, low, high, sweeps % 11 == 10);
            continue;
        }
        sweeps = 0;
        high = low - 1;
    }
    return true;
}
