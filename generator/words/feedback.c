/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "words/job.h"
#include "words/noise.h"

#include <math.h>
#include <stddef.h>

/* Tries the small integers that put zeros of the noise on the unit circle; of equals the smaller
 * ones, which cost less. */
void pw_choose_feedback(const double a[3], bool hold, int32_t *k1, int32_t *k2)
{
    static const int tried[][2] = {
        {0, 0}, {1, 0}, {-1, 0}, {0, 1}, {0, -1}, {1, -1}, {-1, -1}, {2, -1}, {-2, -1},
    };
    double best = INFINITY;
    for (size_t i = 0; i < sizeof tried / sizeof *tried; i++) {
        int sum = tried[i][0] + tried[i][1];
        double power = pw_feedback_power(a, tried[i][0], tried[i][1]);
        if ((hold && sum != 1) || (best < INFINITY && !(power < 0.97 * best)))
            continue;
        best = power;
        *k1 = tried[i][0], *k2 = tried[i][1];
    }
}
