/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "twin/scale.h"

#include <math.h>

pw_scale pw_scale_of(pw_sample sample, const pw_port *port, pw_values values)
{
    bool fixed = sample == PW_Q15 || sample == PW_Q31;
    double one = sample == PW_Q15 ? 32768.0 : sample == PW_Q31 ? 2147483648.0 : 1;
    pw_scale s = {.fixed = fixed,
                  .single = sample == PW_FLOAT32,
                  .unit = 1,
                  .low = -INFINITY,
                  .high = INFINITY};
    if (values == PW_VALUES_VOLTS) s.zero = port->zero, s.unit = port->full_scale / one;
    if (values == PW_VALUES_FULL_SCALE) s.unit = 1 / one;
    if (fixed) s.low = -one, s.high = one - 1;
    return s;
}

double pw_scale_sample(const pw_scale *scale, double value, uint64_t *outside)
{
    double v = (value - scale->zero) / scale->unit;
    if (!scale->fixed) return scale->single ? (double)(float)v : v;
    v = round(v);
    if (v >= scale->low && v <= scale->high) return v;
    ++*outside;
    return v < scale->low ? scale->low : scale->high;
}

double pw_scale_value(const pw_scale *scale, double sample)
{
    return scale->zero + scale->unit * sample;
}
