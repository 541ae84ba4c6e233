/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The response straight from the equations, and how well roots reproduce it. */
#define __STDC_WANT_IEC_60559_TYPES_EXT__ 1      /* fabsf128 */
#include "analog/circuit.h"

#include <math.h>

typedef _Complex _Float128 quad_complex;
typedef long double complex long_complex;

#define REAL long double
#define COMPLEX long_complex
#define SIZE(x) (fabsl(creall(x)) + fabsl(cimagl(x)))
#define NAME eliminate_long
#include "analog/circuit_eliminate.h"
#undef REAL
#undef COMPLEX
#undef SIZE
#undef NAME

#define REAL pw_quad
#define COMPLEX quad_complex
#define SIZE(x) (fabsf128(crealf128(x)) + fabsf128(cimagf128(x)))
#define NAME eliminate_quad
#include "analog/circuit_eliminate.h"

#define POINTS 200
#define DECADES 12
#define SUSPECT 1e-10L           /* beyond this the extended precision is not to be trusted */
#define FLOOR 1e-30L             /* 600 dB below the largest response */

static pw_quad *take_values(const pw_net *net, pw_arena *arena)
{
    pw_quad *value = pw_arena_take(arena, (size_t)net->values * sizeof *value);
    pw_net_values_quad(net, NULL, value);
    return value;
}

static long double *extended(const pw_net *net, const pw_quad *quad, pw_arena *arena)
{
    long double *value = pw_arena_take(arena, (size_t)net->values * sizeof *value);
    for (int i = 0; i < net->values; i++) value[i] = (long double)quad[i];
    return value;
}

void pw_net_fill(const pw_net *net, const pw_quad *value, long double complex s,
                 long double complex *a)
{
    pw_arena arena = {0};
    eliminate_long_fill(net, extended(net, value, &arena), s, a);
    pw_arena_free(&arena);
}

static long_complex respond_long(const pw_net *net, const pw_quad *quad, long_complex s)
{
    pw_arena arena = {0};
    long_complex h = CMPLXL(NAN, NAN);
    if (!eliminate_long(net, extended(net, quad, &arena), s, &h)) h = CMPLXL(NAN, NAN);
    pw_arena_free(&arena);
    return h;
}

static long_complex respond_quad(const pw_net *net, const pw_quad *value, long_complex s)
{
    quad_complex h = 0, at = creall(s) + cimagl(s) * (quad_complex)I;
    if (!eliminate_quad(net, value, at, &h)) return CMPLXL(NAN, NAN);
    return CMPLXL((long double)crealf128(h), (long double)cimagf128(h));
}

double complex pw_net_response(const pw_net *net, double complex s)
{
    pw_arena arena = {0};
    double complex h = (double complex)respond_long(net, take_values(net, &arena), s);
    pw_arena_free(&arena);
    return h;
}

double complex pw_net_response_quad(const pw_net *net, double complex s)
{
    pw_arena arena = {0};
    double complex h = (double complex)respond_quad(net, take_values(net, &arena), s);
    pw_arena_free(&arena);
    return h;
}

/* A pole and a zero in turn, so that the product stays in range. */
static long_complex respond_roots(const pw_roots *r, long_complex s)
{
    long_complex h = r->factor;
    int n = r->poles > r->zeros ? r->poles : r->zeros;
    for (int i = 0; i < n; i++) {
        if (i < r->poles) h /= s - (long_complex)r->pole[i];
        if (i < r->zeros) h *= s - (long_complex)r->zero[i];
    }
    return h;
}

/* The middle of the roots on a logarithmic scale, rad/s. */
static double middle(const pw_net *net, const pw_roots *r)
{
    double sum = 0;
    int n = 0;
    for (int i = 0; i < r->poles + r->zeros; i++) {
        double size = cabs(i < r->poles ? r->pole[i] : r->zero[i - r->poles]);
        if (size > 0) sum += log(size), n++;
    }
    return n ? exp(sum / n) : pw_net_reference(net);
}

typedef struct point { long double w; long_complex roots, direct; } point;

static long double difference(const point *p, long double largest)
{
    long double size = cabsl(p->direct), floor = FLOOR * largest;
    long double d = cabsl(p->roots - p->direct) / (size > floor ? size : floor);
    return d == d ? d : (long double)INFINITY;
}

double pw_net_compare(const pw_net *net, const pw_roots *roots, double *at_hz)
{
    pw_arena arena = {0};
    const pw_quad *value = take_values(net, &arena);
    point p[POINTS];
    long double largest = 0, worst = 0;
    double centre = middle(net, roots);
    *at_hz = 0;
    for (int i = 0; i < POINTS; i++) {
        p[i].w = centre * powl(10, DECADES * (i / (POINTS - 1.0L) - 0.5L));
        p[i].roots = respond_roots(roots, CMPLXL(0, p[i].w));
        p[i].direct = respond_long(net, value, CMPLXL(0, p[i].w));
        if (cabsl(p[i].direct) > largest) largest = cabsl(p[i].direct);
    }
    for (int i = 0; i < POINTS; i++) {
        if (difference(&p[i], largest) > SUSPECT)
            p[i].direct = respond_quad(net, value, CMPLXL(0, p[i].w));
        long double d = difference(&p[i], largest);
        if (d <= worst) continue;
        worst = d;
        *at_hz = (double)(p[i].w / (2 * M_PI));
    }
    pw_arena_free(&arena);
    return (double)worst;
}
