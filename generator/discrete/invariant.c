/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "discrete/transforms.h"

bool pw_impulse_invariant(const pw_roots *analog, double rate_hz, pw_roots *out)
{
    (void)analog; (void)rate_hz; (void)out;
    return false;
}
bool pw_step_invariant(const pw_roots *analog, double rate_hz, pw_roots *out)
{
    (void)analog; (void)rate_hz; (void)out;
    return false;
}
