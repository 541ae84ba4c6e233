/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Shared by the two groupings. */
#ifndef PW_DISCRETE_GROUPING_PARTS_H
#define PW_DISCRETE_GROUPING_PARTS_H

#include "analog/model.h"

/* Indices of the upper root of each complex pair, and of each real root. */
typedef struct pw_root_units {
    int pair[PW_MAX_ROOTS / 2], pairs;
    int real[PW_MAX_ROOTS], reals;
} pw_root_units;

void pw_root_list(const double complex *root, int n, pw_root_units *out);
void pw_units_drop(int *list, int *count, int index);   /* takes list[index] out */

#endif
