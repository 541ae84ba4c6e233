/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Counts what one block of 64 quiet samples costs, 64 steps, the yardstick's 64 samples; then the bytes of stack of a block.
 * STAGE, SAMPLE, SECTIONS, HEADER and the yardstick's words (yard_words) are given. */
#include <stddef.h>
#include <stdint.h>
#include "part.h"
#include "yardstick.h"
#include HEADER

#define JOIN_(a, b) a##b
#define JOIN(a, b) JOIN_(a, b)
#define NAME(suffix) JOIN(STAGE, suffix)

static SAMPLE in[64], out[64], mirror[64];
static NAME(_state) state;
#ifdef YARD_CALL
static YARD_STATE yard_state[SECTIONS][YARD_DELAYS];
static const YARD_WORD yard_words[SECTIONS][5] = YARD_WORDS;
#endif

static void number(uint32_t v)
{
    char text[12];
    int at = 11;
    text[at] = 0;
    do text[--at] = (char)('0' + v % 10u); while (v /= 10u);
    part_write(text + at);
    part_write(" ");
}

/* How deep the stack goes: painted before, looked at afterwards, from frames of the same place. */
#define ROOM 700

static __attribute__((noinline)) void paint(void)
{
    volatile unsigned char room[ROOM];
    for (unsigned i = 0; i < ROOM; i++) room[i] = 0xA5;
}

static __attribute__((noinline)) unsigned depth(void)
{
    volatile unsigned char room[ROOM];
    unsigned i = 0;
    while (i < ROOM && room[i] == 0xA5) i++;
    return ROOM - i;
}

int main(void)
{
    for (int i = 0; i < 64; i++) in[i] = (SAMPLE)((i * 37 % 64 - 32) * QUIET);
    uint32_t empty = part_count();
    empty = part_count() - empty;
    NAME(_reset)(&state);
    uint32_t began = part_count();
    NAME(_block)(&state, in, out, 64);
    number(part_count() - began - empty);
    NAME(_reset)(&state);
    began = part_count();
    for (int i = 0; i < 64; i++) mirror[i] = NAME(_step)(&state, in[i]);
    number(part_count() - began - empty);
    for (int i = 0; i < 64; i++)
        if (mirror[i] != out[i]) return 1;
#ifndef YARD_CALL
    number(0);
#else
    began = part_count();
    YARD_CALL(yard_words, yard_state, SECTIONS, in, mirror, 64);
    number(part_count() - began - empty);
#endif
    NAME(_reset)(&state);
    paint();
    NAME(_block)(&state, in, out, 64);
    number(depth());
    part_write("\n");
    return 0;
}
