/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Million samples a second on this machine: emitted block and yardstick, best of 9 rounds each. */
#include <stdint.h>
#include <stdio.h>
#include <time.h>
#include "yardstick.h"
#include HEADER

#define LENGTH 4096
#define TURNS 24

static SAMPLE in[LENGTH], out[LENGTH];

static double now(void)
{
    struct timespec t;
    clock_gettime(CLOCK_MONOTONIC, &t);
    return (double)t.tv_sec + 1e-9 * (double)t.tv_nsec;
}

#ifdef DOUBLES
/* The yardstick of floats, for doubles. */
static const double words[SECTIONS][5] = YARD_WORDS;
static double delays[SECTIONS][2];
static __attribute__((noinline)) void plain(int sections, const double *from, double *to, int samples)
{
    while (samples-- > 0) {
        double v = *from++;
        for (int s = 0; s < sections; s++) {
            const double u = v;
            v = words[s][0] * u + delays[s][0];
            delays[s][0] = words[s][1] * u + words[s][3] * v + delays[s][1];
            delays[s][1] = words[s][2] * u + words[s][4] * v;
        }
        *to++ = v;
    }
}
#define PLAIN() plain(sections, in, out, LENGTH)
#else
static const YARD_WORD words[SECTIONS][5] = YARD_WORDS;
static YARD_STATE delays[SECTIONS][YARD_DELAYS];
#define PLAIN() YARD_CALL(words, delays, sections, in, out, LENGTH)
#endif

int main(void)
{
    static bench_state state;
    volatile int told = SECTIONS;
    const int sections = told;
    double best[2] = {1e9, 1e9};
    for (int i = 0; i < LENGTH; i++) in[i] = (SAMPLE)(((i * 37) % 64 - 32) * (sizeof(SAMPLE) == 2 ? 100 : 1));
    bench_reset(&state);
    for (int round = 0; round < 9; round++) {
        for (int which = 0; which < 2; which++) {
            const double began = now();
            for (int turn = 0; turn < TURNS; turn++) {
                if (which) PLAIN();
                else bench_block(&state, in, out, LENGTH);
            }
            const double took = now() - began;
            if (took < best[which]) best[which] = took;
        }
    }
    printf("%.3f %.3f\n", 1e-6 * LENGTH * TURNS / best[0], 1e-6 * LENGTH * TURNS / best[1]);
    return 0;
}
