/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The plots of report.html, drawn by gnuplot as SVG elements without a look of their own. */
#ifndef PW_REPORT_PLOTS_H
#define PW_REPORT_PLOTS_H

#include "report/curves.h"
#include "report/results.h"

typedef enum pw_plot {
    PW_PLOT_RESPONSE, PW_PLOT_DELAY, PW_PLOT_STEP, PW_PLOT_S_PLANE, PW_PLOT_Z_PLANE, PW_PLOT_NOISE,
    PW_PLOTS
} pw_plot;

/* Of every plot, in units of its view box; the same left and right edge for all. */
#define PW_PLOT_WIDTH 480
#define PW_PLOT_LEFT 62
#define PW_PLOT_RIGHT 468

int pw_plot_height(pw_plot plot);

typedef struct pw_plots {
    bool wanted;                 /* plots were asked for */
    bool drawn;                  /* false: no gnuplot; every text is empty */
    pw_text body[PW_PLOTS];      /* what goes inside <svg>; empty where there is nothing to plot */
    bool step_logarithmic;       /* the step's time axis */
    bool plane_compressed;       /* the s plane's axes are asinh of the frequency */
    double span_hz[2];           /* of the frequency axes */
} pw_plots;

/* Draws all of them in one run of gnuplot. PW_FAILED where a curve could not be computed. */
PW_CHECKED pw_status pw_plots_draw(const pw_results *results, pw_plots *out);
void pw_plots_free(pw_plots *plots);

#endif
