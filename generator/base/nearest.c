/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "base/nearest.h"

#include <ctype.h>
#include <stddef.h>
#include <string.h>

#define LONGEST 40

static int same(char a, char b)
{
    return tolower((unsigned char)a) == tolower((unsigned char)b);
}

/* Optimal string alignment distance; words of LONGEST letters at most. */
static int distance(const char *a, size_t n, const char *b, size_t m)
{
    int d[LONGEST + 1][LONGEST + 1];
    for (size_t i = 0; i <= n; i++) d[i][0] = (int)i;
    for (size_t j = 0; j <= m; j++) d[0][j] = (int)j;
    for (size_t i = 1; i <= n; i++)
        for (size_t j = 1; j <= m; j++) {
            int best = d[i - 1][j - 1] + !same(a[i - 1], b[j - 1]);
            if (d[i - 1][j] + 1 < best) best = d[i - 1][j] + 1;
            if (d[i][j - 1] + 1 < best) best = d[i][j - 1] + 1;
            if (i > 1 && j > 1 && same(a[i - 1], b[j - 2]) && same(a[i - 2], b[j - 1])
                && d[i - 2][j - 2] + 1 < best)
                best = d[i - 2][j - 2] + 1;
            d[i][j] = best;
        }
    return d[n][m];
}

const char *pw_nearest(const char *word, const char *const *known, int n)
{
    size_t length = strlen(word);
    const char *nearest = NULL;
    int least = 0;
    if (!length || length > LONGEST) return NULL;
    for (int i = 0; i < n; i++) {
        size_t m = strlen(known[i]);
        if (m > LONGEST) continue;
        int d = distance(word, length, known[i], m);
        int allowed = (int)((length > m ? length : m) + 2) / 3;
        if (d <= allowed && (!nearest || d < least)) {
            nearest = known[i];
            least = d;
        }
    }
    return nearest;
}
