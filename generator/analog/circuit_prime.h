/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Arithmetic and polynomials modulo a prime p, 2^60 < p < 2^61, p = 3 mod 4. Operands are 0..p-1;
 * polynomials hold the lowest power first, at most PW_MAX_STORES as a degree. */
#ifndef PW_ANALOG_CIRCUIT_PRIME_H
#define PW_ANALOG_CIRCUIT_PRIME_H

#include <stdint.h>

#define PW_PRIME_TWO_PI UINT64_C(1020847100762815390)   /* a stand-in: any number would do */

static inline uint64_t pw_prime_mul(uint64_t a, uint64_t b, uint64_t p)
{
    return (uint64_t)((unsigned __int128)a * b % p);
}

static inline uint64_t pw_prime_sub(uint64_t a, uint64_t b, uint64_t p)      /* b = p is allowed */
{
    uint64_t d = a >= b ? a - b : a + (p - b);
    return d == p ? 0 : d;
}

uint64_t pw_prime_power(uint64_t a, uint64_t n, uint64_t p);
uint64_t pw_prime_inverse(uint64_t a, uint64_t p);       /* of 0: 0 */
uint64_t pw_prime_root(uint64_t a, uint64_t p);          /* a square root, if a has one */
uint64_t pw_prime_next(uint64_t below);                  /* the largest such prime under it */

/* The residue of the shortest decimal that reads back as this double. */
uint64_t pw_prime_decimal(double x, uint64_t p);

/* The degree of the greatest common divisor. */
int pw_prime_common(const uint64_t *a, int a_degree, const uint64_t *b, int b_degree, uint64_t p);

/* out[k] := how many distinct roots (in the closure) are exactly k-fold, k = 1 .. degree.
 * Square-free factorisation (Yun 1976). */
void pw_prime_multiplicities(const uint64_t *a, int degree, int *out, uint64_t p);

#endif
