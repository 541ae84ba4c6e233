/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/figures.h"

#include <math.h>
#include <stdbool.h>
#include <stdio.h>
#include <string.h>

#define HOUR 3600.0           /* s */

static int one_of(const char *unit, const char *const *list)
{
    for (; *list; list++)
        if (!strcmp(unit, *list)) return 1;
    return 0;
}

char *pw_figure(char *buffer, double value, const char *unit)
{
    static const char *const prefixed[] = {"Hz", "s", "V", "rad/s", NULL};
    static const char *const whole[] = {"bytes", "samples", "cycles", "instructions", "nodes", NULL};
    if (isnan(value)) return strcpy(buffer, "not known");
    if (isinf(value)) return strcpy(buffer, value > 0 ? "unbounded" : "none");
    if (!strcmp(unit, "s") && value != 0 && fabs(value) < 1e-12)
        return strcpy(buffer, "under 1 ps");
    if (one_of(unit, prefixed)) {
        bool low = !strcmp(unit, "Hz") && fabs(value) < 1 && fabs(value) >= 0.001;
        bool long_time = !strcmp(unit, "s") && fabs(value) >= 1000;
        if (value == 0 || low || long_time)
            snprintf(buffer, PW_FIGURE_ROOM, "%.4g %s", value, unit);
        else pw_si(buffer, value, unit, 4);
    } else if (one_of(unit, whole))
        snprintf(buffer, PW_FIGURE_ROOM, "%.10g %s", round(value * 10) / 10, unit);
    else
        snprintf(buffer, PW_FIGURE_ROOM, "%.3g%s%s", value, *unit ? " " : "", unit);
    return buffer;
}

char *pw_count(char *buffer, long n, const char *thing)
{
    snprintf(buffer, PW_FIGURE_ROOM, "%ld %s%s", n, thing, n == 1 ? "" : "s");
    return buffer;
}

char *pw_samples(char *buffer, double samples, double rate_hz)
{
    char time[PW_FIGURE_ROOM];
    double seconds = ceil(samples) / rate_hz;
    if (!isfinite(samples)) return pw_figure(buffer, samples, "samples");
    if (seconds >= 48 * HOUR) snprintf(time, sizeof time, "%.3g days", seconds / (24 * HOUR));
    else if (seconds >= 2 * HOUR) snprintf(time, sizeof time, "%.3g hours", seconds / HOUR);
    else pw_figure(time, seconds, "s");
    snprintf(buffer, PW_FIGURE_ROOM, "%.12g %s (%.30s)", ceil(samples), ceil(samples) == 1 ? "sample" : "samples", time);
    return buffer;
}
