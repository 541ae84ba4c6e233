/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The pieces that gnuplot scripts are made of. Every function appends to script. */
#ifndef PW_REPORT_PLOT_SCRIPT_H
#define PW_REPORT_PLOT_SCRIPT_H

#include "report/plots.h"
#include "report/svg.h"

/* A fresh drawing. */
void pw_script_open(pw_plot plot, pw_text *script);
void pw_script_close(pw_text *script);

/* Where the axes' frame stands, from the top of the drawing, in its units. */
void pw_script_frame(pw_plot plot, double top, double bottom, pw_text *script);

/* A logarithmic x axis from low to high with a tick a decade (or every few), "1k" for 1000;
 * without labels the ticks are bare. unit: what stands under the axis; "" nothing. */
void pw_script_log_x(double low, double high, bool labels, const char *unit, pw_text *script);
/* The title of the y axis, and its range where low < high (else gnuplot's choice). */
void pw_script_y(const char *title, double low, double high, pw_text *script);

/* " using 1:2 with lines lc rgb .. notitle": one curve of a data block. */
void pw_script_line(const char *using, pw_role role, pw_text *script);
void pw_script_color(pw_role role, pw_text *script);

/* A number that gnuplot reads; NaN for what is not finite. */
void pw_script_number(double value, pw_text *script);

/* The plane plots. */
void pw_script_s_plane(const pw_results *results, bool *compressed, pw_text *script);
void pw_script_z_plane(const pw_results *results, pw_text *script);

#endif
