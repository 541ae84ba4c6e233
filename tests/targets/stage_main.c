/* SPDX-License-Identifier: GPL-3.0-or-later */
/* One stage on a part: its self-test; step against block in uneven pieces, in place and not; and the
 * outputs themselves, in hexadecimal, for floats. STAGE, SAMPLE, FLOATS (0 or 1) are given. */
#include <stddef.h>
#include <stdint.h>
#include <string.h>
#include "part.h"
#include HEADER
#include SELFTEST

#define JOIN_(a, b) a##b
#define JOIN(a, b) JOIN_(a, b)
#define NAME(suffix) JOIN(STAGE, suffix)
#define LENGTH 90

void NAME(_run)(void);

static void put_hex(const void *value, size_t bytes)
{
    static const char digit[] = "0123456789abcdef";
    const unsigned char *p = (const unsigned char *)value;
    char text[20];
    size_t at = 0;
    for (size_t i = bytes; i-- > 0;) {                    /* every part here is little-endian */
        text[at++] = digit[p[i] >> 4];
        text[at++] = digit[p[i] & 15];
    }
    text[at++] = '\n';
    text[at] = 0;
    part_write(text);
}

static SAMPLE signal_at(uint32_t *seed)
{
    *seed = *seed * UINT32_C(1664525) + UINT32_C(1013904223);
#if FLOATS
    return (SAMPLE)((int32_t)(*seed >> 8) - 8388608) / (SAMPLE)8388608;
#else
    return (SAMPLE)(*seed >> (32 - 8 * sizeof(SAMPLE)));
#endif
}

void NAME(_run)(void)
{
    static SAMPLE in[LENGTH], one[LENGTH];
    NAME(_state) a, b;
    uint32_t seed = 7;
    size_t at = 0, piece = 1;
    const long differs = NAME(_selftest)();
    part_write(differs ? "selftest differs\n" : "selftest same\n");
    for (size_t i = 0; i < LENGTH; i++) in[i] = signal_at(&seed);
    NAME(_reset)(&a);
    NAME(_reset)(&b);
    for (size_t i = 0; i < LENGTH; i++) one[i] = NAME(_step)(&a, in[i]);
    while (at < LENGTH) {
        if (piece > LENGTH - at) piece = LENGTH - at;
        NAME(_block)(&b, in + at, in + at, piece);
        at += piece;
        piece = piece * 3 % 41;
    }
    part_write(memcmp(in, one, sizeof in) ? "split differs\n" : "split same\n");
#if FLOATS
    for (size_t i = 0; i < LENGTH; i++) put_hex(&one[i], sizeof one[i]);
#else
    {
        const uint32_t clips = NAME(_clipped)(&a);
        part_write(clips == NAME(_clipped)(&b) ? "clips same\n" : "clips differ\n");
        put_hex(&clips, sizeof clips);
    }
#endif
}
