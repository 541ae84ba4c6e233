/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Runs one emitted stage. Compiled with -DSTAGE=name -DSAMPLE=type -DHEADER="name.h"
 * -DSELFTEST="name_selftest.h". Arguments: REPEATS of the comparison of cuts, then "rest" or the
 * value to settle at. Standard input: samples. Prints the self-test's result, the outputs of step
 * (floats with 17 digits), and "clipped N"; exits 1 where step, block in any cut, or block in place
 * differ. */
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include HEADER
#include SELFTEST

#define JOIN2(a, b) a##b
#define JOIN(a, b) JOIN2(a, b)
#define NAME(suffix) JOIN(STAGE, suffix)

enum { MOST = 1 << 16 };

static SAMPLE input[MOST], by_step[MOST], by_block[MOST];

static void start(NAME(_state) *s, const char *how)
{
    memset(s, 0x5a, sizeof *s);          /* reset and settle must set every member */
    if (!strcmp(how, "rest")) NAME(_reset)(s);
    else NAME(_settle)(s, (SAMPLE)atof(how));
}

static void cut(NAME(_state) *s, unsigned *seed, const SAMPLE *in, SAMPLE *out, size_t n)
{
    for (size_t i = 0, m; i < n; i += m) {
        *seed = *seed * 1664525u + 1013904223u;
        m = (*seed >> 16) % 97;          /* 0 among them */
        if (m > n - i) m = n - i;
        NAME(_block)(s, in + i, out + i, m);
    }
}

int main(int argc, char **argv)
{
    NAME(_state) s;
    size_t n = 0;
    double value;
    unsigned seed = 1;
    if (argc < 3) return 2;
    printf("selftest %ld\n", NAME(_selftest)());
    while (n < MOST && scanf("%lf", &value) == 1) input[n++] = (SAMPLE)value;
    start(&s, argv[2]);
    for (size_t i = 0; i < n; i++) by_step[i] = NAME(_step)(&s, input[i]);
    for (size_t i = 0; i < n; i++) printf("%.17g\n", (double)by_step[i]);
#ifdef COUNTS
    printf("clipped %lu\n", (unsigned long)NAME(_clipped)(&s));
    const unsigned long clipped = (unsigned long)NAME(_clipped)(&s);
#endif
    for (int i = 0; i < atoi(argv[1]); i++) {
        start(&s, argv[2]);
        if (i % 2) memcpy(by_block, input, sizeof input);
        cut(&s, &seed, i % 2 ? by_block : input, by_block, n);
        if (memcmp(by_block, by_step, n * sizeof *by_step)) return 1;
#ifdef COUNTS
        if ((unsigned long)NAME(_clipped)(&s) != clipped) return 1;
#endif
    }
    return 0;
}
