/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/html.h"

#include "report/html_parts.h"

/* default-src 'none': the page can fetch nothing, whatever stands in it. */
static const char head[] =
    "<!DOCTYPE html>\n<html lang=\"en\">\n<head>\n<meta charset=\"utf-8\">\n"
    "<meta name=\"viewport\" content=\"width=device-width, initial-scale=1\">\n"
    "<meta name=\"color-scheme\" content=\"light dark\">\n"
    "<meta http-equiv=\"Content-Security-Policy\" content=\"default-src 'none';"
    " style-src 'unsafe-inline'; script-src 'unsafe-inline'; img-src data:\">\n"
    "<link rel=\"icon\" href=\"data:,\">\n<title>";

static void put_page(const pw_results *results, const pw_plots *plots, pw_text *out)
{
    pw_text_add(out, head);
    pw_html_text(results->stage->name, out);
    pw_text_print(out, ": stage report</title>\n<style>\n%s</style>\n</head>\n<body>\n<main>\n",
                  pw_html_style);
    pw_html_verdict(results, out);
    pw_html_stage(results, out);
    pw_html_response(results, plots, out);
    pw_html_delay(results, plots, out);
    pw_html_step(results, plots, out);
    pw_html_planes(results, plots, out);
    pw_html_range(results, out);
    pw_html_noise(results, plots, out);
    pw_html_words(results, out);
    pw_html_cost(results, out);
    pw_html_use(results, out);
    pw_html_end(results, out);
    pw_text_add(out, "</main>\n");
    pw_html_rows(results, out);
    pw_text_print(out, "<script>\n%s</script>\n</body>\n</html>\n", pw_html_script);
}

pw_status pw_report_html(const pw_results *results, bool plots, pw_text *out)
{
    pw_plots drawn = {.drawn = false, .wanted = plots};
    pw_status status = plots ? pw_plots_draw(results, &drawn) : PW_OK;
    if (!status) put_page(results, &drawn, out);
    pw_plots_free(&drawn);
    return status;
}
