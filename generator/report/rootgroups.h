/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Roots as people list them: a pair once, a multiple root once with its count. */
#ifndef PW_REPORT_ROOTGROUPS_H
#define PW_REPORT_ROOTGROUPS_H

#include "analog/model.h"

typedef struct pw_root_group {
    double complex root;         /* imag > 0 stands for the pair */
    int count;
} pw_root_group;

/* Groups the n <= PW_MAX_ROOTS roots that are equal to 9 digits, in the order of their first;
 * returns how many groups. */
int pw_group_roots(const double complex *root, int n, pw_root_group *group);

#endif
