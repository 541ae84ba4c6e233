/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "stagefile/units.h"

#include <math.h>
#include <string.h>

typedef struct dimension {
    const char *phrase, *sample, *unit;
    pw_unit_kind own;            /* the unit of the value that comes out */
    const char *codes;           /* letters that may stand for the point; "" none */
    bool prefixed;               /* a prefix without a unit is enough: 10k */
} dimension;

static const dimension dimensions[PW_DIMENSIONS] = {
    [PW_DIM_NUMBER] = {"a number", "2.5", "", PW_UNIT_NONE, "", true},
    [PW_DIM_RATIO] = {"a ratio", "-2.5 or 20 dB", "", PW_UNIT_NONE, "", true},
    [PW_DIM_DECIBEL] = {"decibels", "0.1 dB", "dB", PW_UNIT_DB, "", false},
    [PW_DIM_FREQUENCY] = {"a frequency", "1 kHz", "Hz", PW_UNIT_HZ, "", true},
    [PW_DIM_ANGULAR] = {"a frequency", "-5 krad/s", "rad/s", PW_UNIT_RAD_S, "", true},
    [PW_DIM_TIME] = {"a time", "12 us", "s", PW_UNIT_SECOND, "", true},
    [PW_DIM_VOLTAGE] = {"a voltage", "3.3 V", "V", PW_UNIT_VOLT, "", true},
    [PW_DIM_CURRENT] = {"a current", "20 mA", "A", PW_UNIT_AMPERE, "", true},
    [PW_DIM_RESISTANCE] = {"a resistance", "4k7", "ohm", PW_UNIT_OHM, "RLmkKMGT", true},
    [PW_DIM_CAPACITANCE] = {"a capacitance", "4n7", "F", PW_UNIT_FARAD, "pnumF", true},
    [PW_DIM_INDUCTANCE] = {"an inductance", "2m2", "H", PW_UNIT_HENRY, "numH", true},
    [PW_DIM_CONDUCTANCE] = {"a conductance", "1 mS", "S", PW_UNIT_SIEMENS, "", true},
    [PW_DIM_ANGLE] = {"an angle", "1 deg", "deg", PW_UNIT_DEGREE, "", false},
    [PW_DIM_FRACTION] = {"a fraction", "1 %", "", PW_UNIT_PERCENT, "", false},
    [PW_DIM_BITS] = {"a number of bits", "16 bits", "bits", PW_UNIT_BIT, "", false},
    [PW_DIM_BYTES] = {"a size", "4 KiB", "bytes", PW_UNIT_BYTE, "", false},
};

const char *pw_dimension_phrase(pw_dimension d) { return dimensions[d].phrase; }
const char *pw_dimension_sample(pw_dimension d) { return dimensions[d].sample; }
const char *pw_dimension_unit(pw_dimension d) { return dimensions[d].unit; }
bool pw_dimension_has_codes(pw_dimension d) { return *dimensions[d].codes; }
bool pw_dimension_takes_bare_prefix(pw_dimension d) { return dimensions[d].prefixed; }

const pw_unit pw_units[] = {
    {"Hz", PW_UNIT_HZ, true, 0, 0},          {"rad/s", PW_UNIT_RAD_S, true, 0, 0},
    {"s", PW_UNIT_SECOND, true, 0, 0},       {"V", PW_UNIT_VOLT, true, 0, 0},
    {"A", PW_UNIT_AMPERE, true, 0, 0},       {"ohm", PW_UNIT_OHM, true, 0, 0},
    {"ohms", PW_UNIT_OHM, true, 0, 0},       {"Ohm", PW_UNIT_OHM, true, 0, 0},
    {"\u03a9", PW_UNIT_OHM, true, 0, 0},     {"\u2126", PW_UNIT_OHM, true, 0, 0},
    {"F", PW_UNIT_FARAD, true, 0, 0},        {"H", PW_UNIT_HENRY, true, 0, 0},
    {"S", PW_UNIT_SIEMENS, true, 0, 0},      {"dB", PW_UNIT_DB, false, 0, 0},
    {"%", PW_UNIT_PERCENT, false, 0, -2},    {"deg", PW_UNIT_DEGREE, false, 0, 0},
    {"\u00b0", PW_UNIT_DEGREE, false, 0, 0}, {"bits", PW_UNIT_BIT, false, 0, 0},
    {"bit", PW_UNIT_BIT, false, 0, 0},       {"bytes", PW_UNIT_BYTE, false, 0, 0},
    {"byte", PW_UNIT_BYTE, false, 0, 0},     {"B", PW_UNIT_BYTE, false, 0, 0},
    {"kB", PW_UNIT_BYTE, false, 0, 3},       {"MB", PW_UNIT_BYTE, false, 0, 6},
    {"KiB", PW_UNIT_BYTE, false, 1024, 0},   {"MiB", PW_UNIT_BYTE, false, 1048576, 0},
};
const int pw_unit_count = (int)(sizeof pw_units / sizeof pw_units[0]);

/* M is mega and m is milli, always; K is taken for k. */
static const pw_prefix prefixes[] = {
    {"f", -15}, {"p", -12}, {"n", -9}, {"u", -6}, {"\u00b5", -6}, {"\u03bc", -6}, {"m", -3},
    {"k", 3}, {"K", 3}, {"M", 6}, {"G", 9}, {"T", 12},
};
#define PREFIXES (sizeof prefixes / sizeof prefixes[0])

const pw_prefix pw_point_letters[] = {
    {"R", 0}, {"F", 0}, {"H", 0}, {"L", -3}, {"p", -12}, {"n", -9}, {"u", -6}, {"\u00b5", -6},
    {"\u03bc", -6}, {"m", -3}, {"k", 3}, {"K", 3}, {"M", 6}, {"G", 9}, {"T", 12},
};
const int pw_point_letter_count = (int)(sizeof pw_point_letters / sizeof pw_point_letters[0]);

bool pw_dimension_takes_code(pw_dimension d, const pw_prefix *letter)
{
    unsigned char first = (unsigned char)letter->name[0];
    return strchr(dimensions[d].codes, first < 0x80 ? first : 'u') != NULL;
}

const char *pw_unit_phrase(pw_unit_kind kind)
{
    static const char *const phrase[] = {
        [PW_UNIT_NONE] = "a number with a prefix that means nothing here",
        [PW_UNIT_HZ] = "a frequency",
        [PW_UNIT_RAD_S] = "a frequency",
        [PW_UNIT_SECOND] = "a time",
        [PW_UNIT_VOLT] = "a voltage",
        [PW_UNIT_AMPERE] = "a current",
        [PW_UNIT_OHM] = "a resistance",
        [PW_UNIT_FARAD] = "a capacitance",
        [PW_UNIT_HENRY] = "an inductance",
        [PW_UNIT_SIEMENS] = "a conductance",
        [PW_UNIT_DB] = "in decibels",
        [PW_UNIT_PERCENT] = "a percentage",
        [PW_UNIT_DEGREE] = "an angle",
        [PW_UNIT_BIT] = "a number of bits",
        [PW_UNIT_BYTE] = "a size",
    };
    return phrase[kind];
}

const pw_unit *pw_unit_find(const char *text, int *exponent)
{
    static const pw_unit bare = {"", PW_UNIT_NONE, true, 0, 0};
    *exponent = 0;
    if (!*text) return &bare;
    for (int i = 0; i < pw_unit_count; i++)
        if (!strcmp(text, pw_units[i].name)) return &pw_units[i];
    for (size_t i = 0; i < PREFIXES; i++) {
        size_t n = strlen(prefixes[i].name);
        if (strncmp(text, prefixes[i].name, n)) continue;
        *exponent = prefixes[i].exponent;
        if (!text[n]) return &bare;
        for (int k = 0; k < pw_unit_count; k++)
            if (pw_units[k].prefixes && !strcmp(text + n, pw_units[k].name)) return &pw_units[k];
    }
    return NULL;
}

double pw_unit_factor(pw_dimension want, pw_unit_kind kind)
{
    if (kind == PW_UNIT_NONE || kind == dimensions[want].own) return 1;
    if (want == PW_DIM_RATIO && kind == PW_UNIT_DB) return 1;
    if (want == PW_DIM_FREQUENCY && kind == PW_UNIT_RAD_S) return 1 / (2 * M_PI);
    if (want == PW_DIM_ANGULAR && kind == PW_UNIT_HZ) return 2 * M_PI;
    return 0;
}

/* ---- for the schema ---- */

static void add_prefixes(pw_text *out)
{
    pw_text_add(out, "(?:");
    for (size_t i = 0; i < PREFIXES; i++)
        pw_text_print(out, "%s%s", i ? "|" : "", prefixes[i].name);
    pw_text_add(out, ")");
}

static void add_unit_pattern(pw_dimension d, pw_text *out)
{
    if (dimensions[d].prefixed) add_prefixes(out);
    for (int i = 0; i < pw_unit_count; i++) {
        if (pw_unit_factor(d, pw_units[i].kind) == 0) continue;
        if (out->data[out->size - 1] != ':') pw_text_add(out, "|");
        if (pw_units[i].prefixes) {
            add_prefixes(out);
            pw_text_add(out, "?");
        }
        pw_text_add(out, pw_units[i].name);
    }
}

static void add_code_pattern(pw_dimension d, pw_text *out)
{
    int added = 0;
    pw_text_add(out, "|(?:[0-9]+(?:");
    for (int twice = 0; twice < 2; twice++) {
        for (int i = 0; i < pw_point_letter_count; i++) {
            if (!pw_dimension_takes_code(d, &pw_point_letters[i])) continue;
            pw_text_print(out, "%s%s", added++ ? "|" : "", pw_point_letters[i].name);
        }
        added = 0;
        pw_text_add(out, twice ? ")[0-9]+" : ")[0-9]*|(?:");
    }
    pw_text_add(out, ")");
}

void pw_dimension_pattern(pw_dimension d, bool may_be_negative, bool may_be_zero, pw_text *out)
{
    pw_text_add(out, "^\\s*");
    if (!may_be_zero)   /* 0 dB is a ratio of 1 */
        pw_text_add(out, d == PW_DIM_RATIO ? "(?![-+\u2212]?[0.]+\\s*$)" : "(?=[^1-9eE]*[1-9])");
    pw_text_add(out, may_be_negative ? "(?:[-+]|\u2212)?" : "\\+?");
    pw_text_add(out, "(?:(?:[0-9]+\\.?[0-9]*|\\.[0-9]+)(?:[eE][-+]?[0-9]+)?");
    if (pw_dimension_has_codes(d)) add_code_pattern(d, out);
    pw_text_add(out, ")\\s*(?:");
    add_unit_pattern(d, out);
    pw_text_add(out, ")?\\s*$");
}
