/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Quantities: IEC 60062 codes against published/part-values.json, prefixes against strtod of the
 * same decimal, and what is refused. */
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include <cmocka.h>
#include <jansson.h>

#include "stagefile/quantity.h"

static double read_as(const char *text, pw_dimension dimension)
{
    pw_quantity_fault fault;
    double value = NAN;
    if (!pw_quantity_read(text, dimension, &value, &fault))
        fail_msg("%s: %s", text, fault.what);
    return value;
}

static void assert_reads(const char *text, pw_dimension dimension, double expected)
{
    double value = read_as(text, dimension);
    if (value != expected) fail_msg("%s: %.17g, not %.17g", text, value, expected);
}

static void assert_refused(const char *text, pw_dimension dimension, const char *words)
{
    pw_quantity_fault fault;
    double value;
    if (pw_quantity_read(text, dimension, &value, &fault))
        fail_msg("%s was read as %.17g", text, value);
    if (!strstr(fault.what, words)) fail_msg("%s: \"%s\" lacks \"%s\"", text, fault.what, words);
}

/* ---- codes ---- */

static void check_codes(const json_t *rows, pw_dimension dimension)
{
    const char *code;
    json_t *value;
    size_t n = 0;
    json_object_foreach((json_t *)rows, code, value) {
        assert_reads(code, dimension, json_number_value(value));
        n++;
    }
    assert_true(n >= 3);
}

/* IEC 60062:2016 as collected in the file; "from_memory" is what its collector marked so. */
static void published_codes(void **state)
{
    (void)state;
    json_error_t error;
    json_t *file = json_load_file("tests/outside/published/part-values.json", 0, &error);
    assert_non_null(file);
    const json_t *data = json_object_get(file, "data");
    check_codes(json_object_get(data, "resistors"), PW_DIM_RESISTANCE);
    check_codes(json_object_get(data, "capacitors_seen"), PW_DIM_CAPACITANCE);
    json_t *memory = json_object_get(data, "from_memory");
    assert_reads("0R1", PW_DIM_RESISTANCE, json_number_value(json_object_get(memory, "0R1")));
    json_object_del(memory, "0R1");
    check_codes(memory, PW_DIM_CAPACITANCE);
    json_decref(file);
}

/* Every E24 value of IEC 60063 in each decade, as a code and as a number with a prefix, is the same
 * double. */
static void codes_equal_prefixes(void **state)
{
    (void)state;
    static const char *const letter[] = {"p", "n", "u", "m"};
    json_error_t error;
    json_t *file = json_load_file("tests/outside/published/part-values.json", 0, &error), *value;
    assert_non_null(file);
    size_t i;
    json_array_foreach(json_object_get(json_object_get(file, "data"), "E24"), i, value) {
        int v = (int)json_integer_value(value);
        for (int k = 0; k < 4; k++) {
            char code[32], plain[32], bare[32];
            snprintf(code, sizeof code, "%d%s%d", v / 10, letter[k], v % 10);
            snprintf(plain, sizeof plain, "%d.%d %sF", v / 10, v % 10, letter[k]);
            snprintf(bare, sizeof bare, "%d.%de-%d", v / 10, v % 10, 12 - 3 * k);
            assert_reads(code, PW_DIM_CAPACITANCE, strtod(bare, NULL));
            assert_reads(plain, PW_DIM_CAPACITANCE, strtod(bare, NULL));
        }
    }
    json_decref(file);
}

static void codes_elsewhere(void **state)
{
    (void)state;
    assert_refused("4k7", PW_DIM_FREQUENCY, "part code");
    assert_refused("4k7", PW_DIM_CAPACITANCE, "not the code of a capacitance");
    assert_refused("4M7", PW_DIM_CAPACITANCE, "not the code of a capacitance");
    assert_refused("4R7", PW_DIM_INDUCTANCE, "not the code of an inductance");
    assert_refused("4n7", PW_DIM_RESISTANCE, "not the code of a resistance");
    assert_refused("R", PW_DIM_RESISTANCE, "not a number");
    assert_refused("4k7 F", PW_DIM_RESISTANCE, "is a capacitance");
    assert_refused("4k7k", PW_DIM_RESISTANCE, "prefix");
    assert_reads("4k7 ohm", PW_DIM_RESISTANCE, 4700);
    assert_reads("2m2", PW_DIM_INDUCTANCE, 2.2e-3);
    assert_reads("4\u00b57", PW_DIM_CAPACITANCE, 4.7e-6);
}

/* ---- prefixes and units ---- */

/* The prefix folds into the exponent: one rounding, that of strtod. */
static void one_rounding(void **state)
{
    (void)state;
    static const struct { const char *prefix; int exponent;
    } rows[] = {
        {"f", -15}, {"p", -12}, {"n", -9}, {"u", -6}, {"\u00b5", -6}, {"\u03bc", -6}, {"m", -3},
        {"", 0},    {"k", 3},   {"K", 3},  {"M", 6},  {"G", 9},       {"T", 12},
    };
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++)
        for (int tenths = 1; tenths < 1000; tenths += 7) {
            char text[48], plain[48];
            snprintf(text, sizeof text, "%d.%d%s%sHz", tenths / 10, tenths % 10, i % 2 ? " " : "",
                     rows[i].prefix);
            snprintf(plain, sizeof plain, "%d.%de%d", tenths / 10, tenths % 10, rows[i].exponent);
            assert_reads(text, PW_DIM_FREQUENCY, strtod(plain, NULL));
        }
    assert_reads("48 kHz", PW_DIM_FREQUENCY, 48000);
    assert_reads("1.6 nF", PW_DIM_CAPACITANCE, 1.6e-9);
    assert_reads("0.1e3k", PW_DIM_FREQUENCY, 1e5);
}

static void mega_and_milli(void **state)
{
    (void)state;
    assert_reads("10M", PW_DIM_RESISTANCE, 10e6);
    assert_reads("10m", PW_DIM_RESISTANCE, 10e-3);
    assert_reads("10 MHz", PW_DIM_FREQUENCY, 10e6);
    assert_reads("10 mHz", PW_DIM_FREQUENCY, 10e-3);
    assert_reads("5 S", PW_DIM_CONDUCTANCE, 5);
    assert_reads("5 s", PW_DIM_TIME, 5);
    assert_refused("5 s", PW_DIM_CONDUCTANCE, "is a time");
}

static void units(void **state)
{
    (void)state;
    assert_reads("125k", PW_DIM_FREQUENCY, 125000);
    assert_reads("  12 us ", PW_DIM_TIME, 12e-6);
    assert_reads("50 mV", PW_DIM_VOLTAGE, 0.05);
    assert_reads("10 k\u03a9", PW_DIM_RESISTANCE, 1e4);
    assert_reads("10 k\u2126", PW_DIM_RESISTANCE, 1e4);
    assert_reads("10\u00a0kHz", PW_DIM_FREQUENCY, 1e4);
    assert_reads("\u22125 krad/s", PW_DIM_ANGULAR, -5000);
    assert_reads("-5", PW_DIM_ANGULAR, -5);
    assert_reads("1 kHz", PW_DIM_ANGULAR, 1000 * 2 * M_PI);
    assert_reads("1 krad/s", PW_DIM_FREQUENCY, 1000 / (2 * M_PI));
    assert_reads("1 %", PW_DIM_FRACTION, 0.01);
    assert_reads("0.01", PW_DIM_FRACTION, 0.01);
    assert_reads("16 bits", PW_DIM_BITS, 16);
    assert_reads("4 KiB", PW_DIM_BYTES, 4096);
    assert_reads("4 kB", PW_DIM_BYTES, 4000);
    assert_reads("0.1 dB", PW_DIM_DECIBEL, 0.1);
    assert_reads("-2.5", PW_DIM_RATIO, -2.5);
    assert_reads("20 dB", PW_DIM_RATIO, 10);
    assert_reads("0 dB", PW_DIM_RATIO, 1);
    assert_reads("3 deg", PW_DIM_ANGLE, 3);
}

static void refused(void **state)
{
    (void)state;
    assert_refused("", PW_DIM_NUMBER, "not a number");
    assert_refused(".", PW_DIM_NUMBER, "not a number");
    assert_refused("-", PW_DIM_NUMBER, "not a number");
    assert_refused("1,5", PW_DIM_NUMBER, "not a number");
    assert_refused("1.5.2", PW_DIM_NUMBER, "not a number");
    assert_refused("1 2", PW_DIM_NUMBER, "not a number");
    assert_refused("nan", PW_DIM_NUMBER, "not a finite number");
    assert_refused("-.inf", PW_DIM_NUMBER, "not a finite number");
    assert_refused("1e999", PW_DIM_NUMBER, "too large");
    assert_refused("1e-999", PW_DIM_NUMBER, "too small");
    assert_refused("1e99999999999999999999", PW_DIM_NUMBER, "too large");
    assert_refused("48 V", PW_DIM_FREQUENCY, "is a voltage");
    assert_refused("48 dB", PW_DIM_FREQUENCY, "is in decibels");
    assert_refused("1m", PW_DIM_DECIBEL, "prefix");
    assert_refused("1 kdeg", PW_DIM_ANGLE, "unknown unit");
    assert_refused("1 kkHz", PW_DIM_FREQUENCY, "unknown unit");
    assert_reads("0e999", PW_DIM_NUMBER, 0);
    assert_reads("-0", PW_DIM_NUMBER, 0);
}

static void nearest_unit(void **state)
{
    (void)state;
    pw_quantity_fault fault;
    double value;
    assert_false(pw_quantity_read("8 khz", PW_DIM_FREQUENCY, &value, &fault));
    assert_string_equal(fault.near, "kHz");
    assert_false(pw_quantity_read("8 krads", PW_DIM_FREQUENCY, &value, &fault));
    assert_string_equal(fault.near, "krad/s");
    assert_false(pw_quantity_read("4 Kib", PW_DIM_BYTES, &value, &fault));
    assert_string_equal(fault.near, "KiB");
}

static void long_text(void **state)
{
    (void)state;
    char text[1000], shown[PW_SHOWN_ROOM];
    memset(text, '1', sizeof text);
    text[sizeof text - 1] = 0;
    assert_refused(text, PW_DIM_NUMBER, "not a number");
    assert_true(strlen(pw_shown(shown, text)) < PW_SHOWN_ROOM);
    assert_string_equal(pw_shown(shown, "two\nlines"), "'two lines'");
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(published_codes), cmocka_unit_test(codes_equal_prefixes),
        cmocka_unit_test(codes_elsewhere), cmocka_unit_test(one_rounding),
        cmocka_unit_test(mega_and_milli),  cmocka_unit_test(units),
        cmocka_unit_test(refused),         cmocka_unit_test(nearest_unit),
        cmocka_unit_test(long_text),
    };
    return cmocka_run_group_tests_name("quantity", tests, NULL, NULL);
}
