/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/rootgroups.h"

#include <math.h>

#define SAME 1e-9

static bool same(double complex a, double complex b)
{
    return cabs(a - b) <= SAME * cabs(a) && (cimag(a) == 0) == (cimag(b) == 0);
}

int pw_group_roots(const double complex *root, int n, pw_root_group *group)
{
    int groups = 0;
    for (int i = 0; i < n; i++) {
        int g = 0;
        if (cimag(root[i]) < 0) continue;
        while (g < groups && !same(group[g].root, root[i])) g++;
        if (g == groups) group[groups++] = (pw_root_group){root[i], 0};
        group[g].count++;
    }
    return groups;
}
