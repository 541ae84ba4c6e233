/* SPDX-License-Identifier: GPL-3.0-or-later */
/* --set PATH=VALUE on the tree of a stage file. */
#ifndef PW_STAGEFILE_OVERRIDE_H
#define PW_STAGEFILE_OVERRIDE_H

#include "stagefile/tree.h"

/* Puts VALUE (YAML) at PATH ("transform.method"); maps on the way are made where they are missing.
 * at: the place that faults and new nodes get. An item of a list is named by its number, from 1. */
void pw_override(const char *set, pw_where at, pw_arena *arena, pw_tree *root,
                 pw_messages *messages);

#endif
