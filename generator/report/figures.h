/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Figures as people read them: with a unit, with as many digits as mean something. */
#ifndef PW_REPORT_FIGURES_H
#define PW_REPORT_FIGURES_H

#include "base/text.h"

#define PW_FIGURE_ROOM 64

/* value with its unit in buffer (PW_FIGURE_ROOM bytes), which is returned. Hz, s, V, rad/s get an
 * SI prefix (but 0.5 Hz, not 500 mHz, and no ks); bytes, samples, cycles and nodes stay whole where
 * they are; everything else has three significant digits. NAN is "not known", infinities are
 * "unbounded" and "none". */
char *pw_figure(char *buffer, double value, const char *unit);

/* "1 node", "3 nodes". */
char *pw_count(char *buffer, long n, const char *thing);

/* Seconds from a count of samples: "812 samples (101 ms)". */
char *pw_samples(char *buffer, double samples, double rate_hz);

#endif
