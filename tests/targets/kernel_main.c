/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Runs a cascade's kernels beside the arithmetic of words/realisation.h, written out here once more
 * one sample at a time in 64 bits, over random signals in random blocks, in place and not, and
 * over every corner; then counts what a block of 64 and 64 steps cost.
 * Before this file: SAMPLE, LOW, HIGH, SECTIONS, WRAP, TRUNCATE, QUIET, ROUNDS and the table `ref`. */
#include <stddef.h>
#include <stdint.h>
#include <string.h>
#include "part.h"

typedef struct { SAMPLE d[SECTIONS][4]; uint32_t clipped; } probe_state;

static int64_t ref_value(const ref_words *w, const SAMPLE *d, SAMPLE x)
{
    int64_t p = (int64_t)w->b0 * x + (int64_t)w->b1 * d[0] + (int64_t)w->b2 * d[1];
    const int shift = w->bf - w->af;
    const int64_t half = TRUNCATE || w->af == 0 ? 0 : (int64_t)1 << (w->af - 1);
    if (shift > 0) p = (p + ((int64_t)1 << (shift - 1))) >> shift;
    if (shift < 0) p = p * ((int64_t)1 << -shift);
    p = p - (int64_t)w->a1 * d[2] - (int64_t)w->a2 * d[3];
    return (p + half) >> w->af;
}

static SAMPLE probe_cascade(probe_state *s, SAMPLE x)
{
    for (int k = 0; k < SECTIONS; k++) {
        SAMPLE *d = s->d[k];
        const int64_t v = ref_value(&ref[k], d, x);
        SAMPLE y = (SAMPLE)v;
        if (v != y) {
            s->clipped++;
            if (!WRAP) y = v < 0 ? LOW : HIGH;
        }
        d[1] = d[0];
        d[0] = x;
        d[3] = d[2];
        d[2] = y;
        x = y;
    }
    return x;
}

#include "kernels.h"

static uint32_t seed = 12345u;
static uint32_t chance(void)
{
    seed ^= seed << 13;
    seed ^= seed >> 17;
    return seed ^= seed << 5;
}

/* Loud, soft, corners, silence. */
static SAMPLE loud(uint32_t kind)
{
    const uint32_t r = chance();
    const SAMPLE any = (SAMPLE)(r ^ r >> 16);
    switch (kind & 7u) {
    case 0: return r & 64u ? LOW : HIGH;
    case 1: return any;
    case 2: return (SAMPLE)(any / 16);
    case 3: return LOW;
    case 4: return (SAMPLE)((int32_t)(r & 7u) - 4);
    case 5: return r & 1024u ? LOW : any;
    case 6: return (SAMPLE)(any / 3);
    default: return 0;
    }
}

/* QUIET: nothing may clip. */
static SAMPLE sample(uint32_t kind)
{
    return (SAMPLE)(loud(kind) / (QUIET ? 128 : 1));
}

static void number(uint32_t v)
{
    char text[12];
    int at = 11;
    text[at] = 0;
    do text[--at] = (char)('0' + v % 10u); while (v /= 10u);
    part_write(text + at);
    part_write(" ");
}

#define ROOM 160
static SAMPLE in[ROOM + 8], out[ROOM + 8], want[ROOM];
static probe_state mine, reference;

static int round_differs(void)
{
    const size_t n = chance() % ROOM, offset = chance() & 1u;
    const uint32_t kind = chance() >> 9;
    SAMPLE *const to = kind & 32u ? in + offset : out + offset;
    for (size_t i = 0; i < n; i++) in[i + offset] = sample(kind & 8u ? kind : chance() >> 5);
    for (size_t i = 0; i < n; i++) want[i] = probe_cascade(&reference, in[i + offset]);
    to[n] = 77;
    probe_block(&mine, in + offset, to, n);
    return memcmp(to, want, n * sizeof *want) || memcmp(&mine, &reference, sizeof mine) || to[n] != 77;
}

static void count(void)
{
    for (size_t i = 0; i < 64; i++) in[i] = (SAMPLE)(loud(1) / 128);
    memset(&mine, 0, sizeof mine);
    memset(&reference, 0, sizeof reference);
    uint32_t empty = part_count();
    empty = part_count() - empty;
    const uint32_t began = part_count();
    probe_block(&mine, in, out, 64);
    number(part_count() - began - empty);
    part_write("\n");
}

int main(void)
{
    uint32_t clips = 0;
    for (uint32_t round = 0; round < ROUNDS; round++) {
        if (round % 16u == 0)
            for (int k = 0; k < SECTIONS; k++)
                for (int j = 0; j < 4; j++) mine.d[k][j] = sample(chance() >> 4);
        clips += mine.clipped;
        mine.clipped = 0;
        reference = mine;
        if (round_differs()) {
            part_write("differs in round ");
            number(round);
            part_write("\n");
            return 1;
        }
    }
    number(clips + mine.clipped);
    count();
    return 0;
}
