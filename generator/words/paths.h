/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Every source of a realisation (input, rounding) and its norms to every later node. */
#ifndef PW_WORDS_PATHS_H
#define PW_WORDS_PATHS_H

#include "words/inner.h"

typedef enum pw_source {
    PW_SOURCE_OUTPUT,            /* rounding of the output word, through its error feedback */
    PW_SOURCE_U1, PW_SOURCE_U2,  /* coupled: rounding of the two words */
    PW_SOURCES
} pw_source;

typedef struct pw_route {
    pw_norm (*norm)[PW_PLACES];  /* norm[k - from] for section k, from <= k < reach; null: not
                                    run */
    int reach;                   /* one past the last section that it reaches before an
                                    integrator */
} pw_route;

typedef struct pw_paths {
    int count;
    pw_line line[PW_MAX_SECTIONS];
    bool integrates[PW_MAX_SECTIONS];
    pw_route input[PW_MAX_SECTIONS];                 /* from the input of section k */
    pw_route source[PW_MAX_SECTIONS][PW_SOURCES];    /* from a rounding in section k */
    pw_route shift[PW_MAX_SECTIONS];                 /* from the alignment of b in section k */
    pw_route settle[PW_MAX_SECTIONS];                /* direct: from y1 = y2 = 1 in section k */
} pw_paths;

/* Runs are made when first asked for, and kept. Free when done. */
void pw_paths_make(const pw_realisation *r, pw_paths *out);
void pw_paths_free(pw_paths *paths);
const pw_route *pw_paths_input(pw_paths *paths, int from);
const pw_route *pw_paths_source(pw_paths *paths, const pw_words *words, int section,
                                pw_source source);
const pw_route *pw_paths_shift(pw_paths *paths, int section);
const pw_route *pw_paths_settle(pw_paths *paths, int section);
/* The section as such a source sees it: what stands for it in the chain. */
pw_line pw_paths_source_line(const pw_paths *paths, const pw_words *words, int section,
                             pw_source source);
pw_line pw_paths_shift_line(const pw_paths *paths, int section);
/* >= L1 from the alignment of b in section j to the output of section k, without a run. */
long double pw_paths_shift_bound(const pw_paths *paths, int j, int k);

#endif
