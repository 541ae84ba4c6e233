/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "base/arena.h"

#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

struct pw_arena_block {
    struct pw_arena_block *next;
    size_t used, size;
    _Alignas(max_align_t) unsigned char bytes[];
};

static void exhausted(void)
{
    fputs("polewright: memory is exhausted\n", stderr);
    exit(PW_FAILED);
}

void *pw_take(size_t bytes)
{
    void *p = calloc(1, bytes ? bytes : 1);
    if (!p) exhausted();
    return p;
}

void *pw_retake(void *old, size_t bytes)
{
    void *p = realloc(old, bytes ? bytes : 1);
    if (!p) exhausted();
    return p;
}

void *pw_arena_take(pw_arena *arena, size_t bytes)
{
    const size_t align = _Alignof(max_align_t);
    bytes = (bytes + align - 1) / align * align;
    struct pw_arena_block *block = arena->blocks;
    if (!block || block->size - block->used < bytes) {
        size_t size = bytes > 8192 ? bytes : 8192;
        block = pw_take(sizeof *block + size);
        block->size = size;
        block->next = arena->blocks;
        arena->blocks = block;
    }
    void *p = block->bytes + block->used;
    block->used += bytes;
    return p;
}

char *pw_arena_copy(pw_arena *arena, const char *text)
{
    size_t n = strlen(text) + 1;
    return memcpy(pw_arena_take(arena, n), text, n);
}

char *pw_arena_print(pw_arena *arena, const char *format, ...)
{
    va_list args, again;
    va_start(args, format);
    va_copy(again, args);
    int n = vsnprintf(NULL, 0, format, args);
    char *p = pw_arena_take(arena, (size_t)n + 1);
    vsnprintf(p, (size_t)n + 1, format, again);
    va_end(again);
    va_end(args);
    return p;
}

void pw_arena_free(pw_arena *arena)
{
    for (struct pw_arena_block *b = arena->blocks, *next; b; b = next) {
        next = b->next;
        free(b);
    }
    arena->blocks = NULL;
}
