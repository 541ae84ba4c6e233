/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The known word that a mistyped one most likely meant. */
#ifndef PW_BASE_NEAREST_H
#define PW_BASE_NEAREST_H

/* The nearest of n words by edit distance (insert, delete, replace, swap of neighbours: 1 each;
 * case is free), or null where none is near: more than a third of the longer word differs. */
const char *pw_nearest(const char *word, const char *const *known, int n);

#endif
