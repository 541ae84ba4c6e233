/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <setjmp.h>
#include <stdarg.h>
#include <stdbool.h>
#include <stddef.h>
#include <string.h>
#include <cmocka.h>

#include "report/svg.h"

static void assert_taken(const char *svg, const char *expected)
{
    pw_text in = {0}, out = {0};
    pw_text_print(&in, "<?xml?><svg><title>T</title><defs><path d='M0,0'/></defs>%s</svg>tail", svg);
    const char *at = in.data;
    assert_true(pw_svg_take(&at, &out));
    assert_string_equal(pw_text_string(&out), expected);
    assert_string_equal(at, "tail");
    pw_text_free(&in);
    pw_text_free(&out);
}

static void a_line_keeps_its_role_and_a_decimal(void **state)
{
    (void)state;
    assert_taken("<path stroke='rgb(  0,   0,  17)' stroke-dasharray='2,4' class=\"gridline\" "
                 " d='M67.20,255.00 L465.59,-0.04  '/>",
                 "<path class=\"l r17\" d=\"M67.2,255 L465.6,0\"/>\n");
    assert_taken("<path stroke='rgb(0,0,1)' d='M1,2 L3,4\nL5.55,6.25'/>",
                 "<path class=\"l r1\" d=\"M1,2 L3,4 L5.5,6.2\"/>\n");
}

static void what_has_no_role_is_left_out(void **state)
{
    (void)state;
    assert_taken("<rect x='0' fill='#ffffff'/><path stroke='black' d='M0,0 L1,1'/>"
                 "<path stroke='rgb(1,0,17)' d='M0,0'/><g id='gnuplot_canvas'></g>"
                 "<path stroke='rgb(0,0,17)'/>", "");
}

static void areas_marks_and_text(void **state)
{
    (void)state;
    assert_taken("<polygon fill = 'rgb(  0,   0,   4)' points = '1.00,2.00 3.00,4.04 '/>",
                 "<polygon class=\"a r4\" points=\"1,2 3,4\"/>\n");
    assert_taken("<use xlink:href='#gpPt1' transform='translate(10.04,20.00) scale(4.50)'"
                 " color='rgb(  0,   0,   7)'/>",
                 "<circle class=\"m r7\" r=\"5\" cx=\"10\" cy=\"20\"/>\n");
    assert_taken("<use xlink:href='#gpPt1' transform='translate(10.00,20.00) scale(4.50)'"
                 " color='rgb(  0,   0,   2)'/>",
                 "<path class=\"m r2\" d=\"M-5-5 5 5M-5 5 5-5\" transform=\"translate(10 20)\"/>\n");
    assert_taken("<g transform=\"translate(57.41,259.55)\" stroke=\"none\" fill=\"rgb(0,0,19)\""
                 " font-family=\"sans-serif\" font-size=\"13.00\"  text-anchor=\"end\">\n"
                 "\t\t<text> 0 &lt; 5</text></g>",
                 "<text class=\"r19\" text-anchor=\"end\" transform=\"translate(57.4 259.6)\">"
                 "0 &lt; 5</text>\n");
    assert_taken("<g transform=\"translate(20,160) rotate(270)\" stroke=\"none\" fill=\"rgb(0,0,19)\""
                 " font-size=\"13.00\" text-anchor=\"start\"><text>dB</text></g>",
                 "<text class=\"r19\" transform=\"translate(20 160)rotate(-90)\">dB</text>\n");
}

static void what_is_no_svg_is_refused(void **state)
{
    (void)state;
    static const char *const bad[] = {"", "<svg>", "<svg></defs>", "</svg>", "<defs></defs"};
    for (size_t i = 0; i < sizeof bad / sizeof *bad; i++) {
        pw_text out = {0};
        const char *at = bad[i];
        assert_false(pw_svg_take(&at, &out));
        assert_ptr_equal(at, bad[i]);
        pw_text_free(&out);
    }
}

/* Anything between the marks: nothing may be read beyond its end. */
static void torn_tags_do_no_harm(void **state)
{
    (void)state;
    assert_taken("<path stroke='rgb(0,0,1) d='M1,2", "");
    assert_taken("<use transform='translate(' color='rgb(0,0,2)'/>", "");
    assert_taken("<g fill=\"rgb(0,0,19)\" font-size=\"1\" transform=\"translate(1,2)\"><text>open", "");
    assert_taken("<polygon fill=", "");
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(a_line_keeps_its_role_and_a_decimal),
        cmocka_unit_test(what_has_no_role_is_left_out), cmocka_unit_test(areas_marks_and_text),
        cmocka_unit_test(what_is_no_svg_is_refused), cmocka_unit_test(torn_tags_do_no_harm),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
