/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A part that the C is made for: data read from targets/<name>/settings.yaml. */
#ifndef PW_TARGET_TARGET_H
#define PW_TARGET_TARGET_H

#include <stdbool.h>
#include "base/messages.h"
#include "base/text.h"
#include "base/arena.h"

/* The instruction set that kernels may be written for; any: portable C alone. */
typedef enum pw_instructions {
    PW_ANY, PW_ARMV6_M, PW_ARMV7_M, PW_ARMV7E_M, PW_ARMV8_1_M, PW_RV32, PW_AVR
} pw_instructions;

typedef struct pw_target {
    const char *name, *about;
    pw_instructions instructions;
    const char *compiler;        /* "arm-none-eabi-gcc" */
    const char *flags;           /* core flags: "-mcpu=cortex-m4 -mthumb .." */
    const char *emulator;        /* command line, {program} stands for the image; "" none */
    int word_bits;               /* native register: 8, 16, 32, 64 */
    bool has_float, has_double;  /* in hardware */
    bool has_multiply;           /* word x word in one instruction (8 x 8 -> 16 on 8 bits) */
    bool has_dsp;                /* dual 16-bit multiply-accumulate, saturation with shift */
    bool has_long_multiply;      /* 32 x 32 -> 64 */
    bool has_saturate;           /* one-instruction saturation */
    bool has_vector;             /* M-profile vector unit */
    bool counts_cycles;          /* the cost model's unit: cycles; otherwise instructions */
    long flash_bytes, ram_bytes; /* of the part; 0 unknown */
    struct pw_cost_model *cost;  /* null: none (host); see target/cost.h */
    pw_arena arena;
} pw_target;

/* A message where there is no such target, and PW_WRONG. */
PW_CHECKED pw_status pw_target_check(const char *name, pw_where at, pw_messages *messages);

/* Reads targets/<name>/. PW_WRONG with a message (nearest known name) where there is no such one;
 * PW_FAILED where the settings file itself is at fault (a line on stderr says where). */
PW_CHECKED pw_status pw_target_read(const char *name, pw_where at, pw_target *out, pw_messages *messages);
void pw_target_free(pw_target *target);

/* The names of all targets, sorted, in arena memory; count in *n. */
PW_CHECKED pw_status pw_target_names(pw_arena *arena, const char ***names, int *n);

/* "armv7e-m", as the settings file spells it. */
const char *pw_instructions_word(pw_instructions instructions);

#endif
