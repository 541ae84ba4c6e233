/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The sections of report.html. Every function appends to out. */
#ifndef PW_REPORT_HTML_PARTS_H
#define PW_REPORT_HTML_PARTS_H

#include "report/plots.h"
#include "report/results.h"

/* Text as HTML text or as an attribute's value. */
void pw_html_text(const char *text, pw_text *out);
/* A phrase of phrases.h, escaped, its first letter a capital, a full stop at the end. */
typedef void pw_html_phrase(const pw_results *results, pw_text *out);
void pw_html_sentence(pw_html_phrase *say, const pw_results *results, pw_text *out);

/* The same for a text; nothing for an empty one. */
void pw_html_say(const char *text, pw_text *out);
/* A name and a value of a <dl>. */
void pw_html_fact(const char *name, const char *value, pw_text *out);

/* <section> with its heading, and its end. id is unique in the page. */
void pw_html_open(const char *id, const char *heading, pw_text *out);
void pw_html_close(pw_text *out);

extern const char pw_html_style[];
extern const char pw_html_script[];

void pw_html_verdict(const pw_results *results, pw_text *out);
void pw_html_stage(const pw_results *results, pw_text *out);
void pw_html_response(const pw_results *results, const pw_plots *plots, pw_text *out);
void pw_html_delay(const pw_results *results, const pw_plots *plots, pw_text *out);
void pw_html_step(const pw_results *results, const pw_plots *plots, pw_text *out);
void pw_html_planes(const pw_results *results, const pw_plots *plots, pw_text *out);
void pw_html_range(const pw_results *results, pw_text *out);
void pw_html_noise(const pw_results *results, const pw_plots *plots, pw_text *out);
void pw_html_words(const pw_results *results, pw_text *out);
void pw_html_cost(const pw_results *results, pw_text *out);
void pw_html_use(const pw_results *results, pw_text *out);
void pw_html_end(const pw_results *results, pw_text *out);
/* The table of every root. */
void pw_html_roots(const pw_results *results, pw_text *out);
/* The rows of the response for the script that reads them under the pointer. */
void pw_html_rows(const pw_results *results, pw_text *out);

#endif
