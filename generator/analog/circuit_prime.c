/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analog/circuit_prime.h"

#include <stdlib.h>
#include <string.h>

#include "analog/circuit.h"
#include "base/text.h"

uint64_t pw_prime_power(uint64_t a, uint64_t n, uint64_t p)
{
    uint64_t result = 1;
    for (; n; n >>= 1, a = pw_prime_mul(a, a, p))
        if (n & 1) result = pw_prime_mul(result, a, p);
    return result;
}

uint64_t pw_prime_inverse(uint64_t a, uint64_t p)
{
    return pw_prime_power(a, p - 2, p);
}

uint64_t pw_prime_root(uint64_t a, uint64_t p)
{
    return pw_prime_power(a, (p + 1) / 4, p);
}

/* Miller-Rabin with the first twelve primes, which is a proof below 3e24 (Sorenson, Webster 2015);
 * for p = 3 mod 4 one squaring decides. */
static int is_prime(uint64_t p)
{
    static const int base[] = {2, 3, 5, 7, 11, 13, 17, 19, 23, 29, 31, 37};
    for (int i = 0; i < 12; i++) {
        if (p % (uint64_t)base[i] == 0) return 0;
        uint64_t x = pw_prime_power((uint64_t)base[i], (p - 1) / 2, p);
        if (x != 1 && x != p - 1) return 0;
    }
    return 1;
}

uint64_t pw_prime_next(uint64_t below)
{
    uint64_t p = below - 1;
    while (p % 4 != 3) p--;
    while (!is_prime(p)) p -= 4;
    return p;
}

uint64_t pw_prime_decimal(double x, uint64_t p)
{
    char text[PW_NUMBER_ROOM];
    int power = 0, point = 0, minus = 0;
    uint64_t digits = 0;
    const char *c = pw_shortest(text, x);
    for (; *c && *c != 'e'; c++) {
        if (*c == '-') minus = 1;
        else if (*c == '.') point = 1;
        else if (*c >= '0' && *c <= '9') {
            digits = digits * 10 + (uint64_t)(*c - '0');
            power -= point;
        }
        else return 0;
    }
    if (*c == 'e') power += atoi(c + 1);
    uint64_t ten = pw_prime_power(10, (uint64_t)abs(power), p);
    if (power < 0) ten = pw_prime_inverse(ten, p);
    uint64_t result = pw_prime_mul(digits % p, ten, p);
    return minus && result ? p - result : result;
}

/* ---- Polynomials ---- */

static int trim(const uint64_t *a, int degree)
{
    while (degree >= 0 && !a[degree]) degree--;
    return degree;
}

/* a := the rest of a / b; the quotient goes to out (may be null). The rest's degree. */
static int divide(uint64_t *a, int n, const uint64_t *b, int m, uint64_t *out, uint64_t p)
{
    uint64_t over = pw_prime_inverse(b[m], p);
    for (int k = n - m; k >= 0; k--) {
        uint64_t f = pw_prime_mul(a[k + m], over, p);
        if (out) out[k] = f;
        for (int j = 0; j <= m && f; j++)
            a[k + j] = pw_prime_sub(a[k + j], pw_prime_mul(f, b[j], p), p);
    }
    return trim(a, m - 1 < n ? m - 1 : n);
}

/* gcd(a, b) to out; its degree. */
static int common_to(const uint64_t *a, int n, const uint64_t *b, int m, uint64_t *out, uint64_t p)
{
    uint64_t x[PW_MAX_STORES + 1], y[PW_MAX_STORES + 1], *left = x, *right = y;
    memcpy(x, a, (size_t)(n + 1) * sizeof *x);
    memcpy(y, b, (size_t)(m + 1) * sizeof *y);
    n = trim(left, n);
    m = trim(right, m);
    while (m >= 0) {
        int rest = divide(left, n, right, m, NULL, p);
        uint64_t *t = left;
        left = right;
        right = t;
        n = m;
        m = rest;
    }
    memcpy(out, left, (size_t)(n + 1) * sizeof *out);
    return n;
}

int pw_prime_common(const uint64_t *a, int n, const uint64_t *b, int m, uint64_t p)
{
    uint64_t out[PW_MAX_STORES + 1];
    return common_to(a, n, b, m, out, p);
}

static void derivative(const uint64_t *a, int n, uint64_t *out, uint64_t p)
{
    for (int k = 1; k <= n; k++) out[k - 1] = pw_prime_mul(a[k], (uint64_t)k, p);
    if (n == 0) out[0] = 0;
}

/* Musser's form: with c the product of the distinct factors left, gcd(c, rest) drops those of
 * multiplicity k at step k. */
void pw_prime_multiplicities(const uint64_t *a, int degree, int *out, uint64_t p)
{
    uint64_t rest[PW_MAX_STORES + 1], c[PW_MAX_STORES + 1], t[PW_MAX_STORES + 1];
    uint64_t next[PW_MAX_STORES + 1];
    for (int k = 0; k <= degree; k++) out[k] = 0;
    if (degree == 0) return;
    derivative(a, degree, t, p);
    int rest_degree = common_to(a, degree, t, degree - 1, rest, p);
    memcpy(t, a, (size_t)(degree + 1) * sizeof *t);
    divide(t, degree, rest, rest_degree, c, p);
    int c_degree = degree - rest_degree;
    for (int k = 1; c_degree > 0; k++) {
        int next_degree = common_to(c, c_degree, rest, rest_degree, next, p);
        out[k] = c_degree - next_degree;
        memcpy(t, rest, (size_t)(rest_degree + 1) * sizeof *t);
        divide(t, rest_degree, next, next_degree, rest, p);
        rest_degree -= next_degree;
        memcpy(c, next, (size_t)(next_degree + 1) * sizeof *c);
        c_degree = next_degree;
    }
}
