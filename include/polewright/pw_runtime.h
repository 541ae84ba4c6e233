/* SPDX-License-Identifier: 0BSD */
/* What every file of the runtime and every stage made for it stands on: the version of the format
 * that they share, and what they ask of the machine. Costs nothing: no code, no data. */
#ifndef PW_RUNTIME_H
#define PW_RUNTIME_H

#include <limits.h>
#include <stddef.h>
#include <stdint.h>

/* Counts up when a table, a state or the meaning of a kernel changes. A stage checks it. */
#define PW_RUNTIME_FORMAT 1

#if CHAR_BIT != 8
#error "polewright needs bytes of 8 bits: this machine has others"
#endif
#if !defined(INT16_MAX) || !defined(INT32_MAX) || !defined(INT64_MAX)
#error "polewright needs int16_t, int32_t and int64_t: use a compiler with C99's <stdint.h>"
#endif

/* An array of -1 elements where the condition fails; the name says what to do about it. */
#define PW_ASSERT(condition, name) typedef char name[(condition) ? 1 : -1]

/* intN_t are two's complement by C99 7.18.1.1; a right shift of a negative value is the compiler's
 * choice, and every compiler of note shifts the sign in. */
PW_ASSERT(((int32_t)-3 >> 1) == -2 && ((int64_t)-3 >> 1) == -2,
          pw_needs_a_compiler_whose_right_shift_is_arithmetic);

#endif
