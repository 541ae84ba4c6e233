/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Memory that lives as long as one run of the program or one analysis: taken piecewise, freed at
 * once. When memory is exhausted the program says so and exits with status 3; no caller checks. */
#ifndef PW_BASE_ARENA_H
#define PW_BASE_ARENA_H

#include <stddef.h>
#include "base/status.h"

typedef struct pw_arena { struct pw_arena_block *blocks; } pw_arena;   /* {0} is an empty arena */

void *pw_arena_take(pw_arena *arena, size_t bytes);      /* zeroed, aligned for any type */
char *pw_arena_copy(pw_arena *arena, const char *text);  /* a copy of a string */
char *pw_arena_print(pw_arena *arena, const char *format, ...) PW_PRINTF(2, 3);
void  pw_arena_free(pw_arena *arena);                    /* all of it; the arena is empty again */

/* malloc and realloc that exit with status 3 when memory is exhausted. */
void *pw_take(size_t bytes);
void *pw_retake(void *old, size_t bytes);

#endif
