/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "stagefile/quantity.h"

#include <ctype.h>
#include <errno.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/nearest.h"

#define LONGEST 200              /* bytes of a quantity; longer text is none */
#define MOST_EXPONENT 9999       /* beyond any double, and small enough to add to */

typedef struct dimension {
    const char *phrase, *sample, *unit;
    const char *codes;           /* letters that may stand for the point; "" none */
    bool prefixed;               /* a prefix without a unit is enough: 10k */
} dimension;

static const dimension dimensions[PW_DIMENSIONS] = {
    [PW_DIM_NUMBER] = {"a number", "2.5", "", "", true},
    [PW_DIM_RATIO] = {"a ratio", "-2.5 or 20 dB", "", "", true},
    [PW_DIM_DECIBEL] = {"decibels", "0.1 dB", "dB", "", false},
    [PW_DIM_FREQUENCY] = {"a frequency", "1 kHz", "Hz", "", true},
    [PW_DIM_ANGULAR] = {"a frequency", "-5 krad/s", "rad/s", "", true},
    [PW_DIM_TIME] = {"a time", "12 us", "s", "", true},
    [PW_DIM_VOLTAGE] = {"a voltage", "3.3 V", "V", "", true},
    [PW_DIM_CURRENT] = {"a current", "20 mA", "A", "", true},
    [PW_DIM_RESISTANCE] = {"a resistance", "4k7", "ohm", "RLmkKMGT", true},
    [PW_DIM_CAPACITANCE] = {"a capacitance", "4n7", "F", "pnumF", true},
    [PW_DIM_INDUCTANCE] = {"an inductance", "2m2", "H", "numH", true},
    [PW_DIM_CONDUCTANCE] = {"a conductance", "1 mS", "S", "", true},
    [PW_DIM_ANGLE] = {"an angle", "1 deg", "deg", "", false},
    [PW_DIM_FRACTION] = {"a fraction", "1 %", "", "", false},
    [PW_DIM_BITS] = {"a number of bits", "16 bits", "bits", "", false},
    [PW_DIM_BYTES] = {"a size", "4 KiB", "bytes", "", false},
};

const char *pw_dimension_phrase(pw_dimension d) { return dimensions[d].phrase; }
const char *pw_dimension_sample(pw_dimension d) { return dimensions[d].sample; }
const char *pw_dimension_unit(pw_dimension d) { return dimensions[d].unit; }

typedef enum unit_kind {
    U_NONE, U_HZ, U_RAD_S, U_S, U_V, U_A, U_OHM, U_F, U_H, U_SIEMENS, U_DB, U_PERCENT, U_DEG, U_BITS, U_BYTES
} unit_kind;

typedef struct unit {
    const char *name;
    unit_kind kind;
    bool prefixes;               /* may carry an SI prefix */
    double times;                /* of the unit of its kind; 0: 1 */
    int exponent;                /* decimal, of the unit of its kind */
} unit;

static const unit units[] = {
    {"Hz", U_HZ, true, 0, 0}, {"rad/s", U_RAD_S, true, 0, 0}, {"s", U_S, true, 0, 0},
    {"V", U_V, true, 0, 0}, {"A", U_A, true, 0, 0},
    {"ohm", U_OHM, true, 0, 0}, {"ohms", U_OHM, true, 0, 0}, {"Ohm", U_OHM, true, 0, 0},
    {"\u03a9", U_OHM, true, 0, 0}, {"\u2126", U_OHM, true, 0, 0},
    {"F", U_F, true, 0, 0}, {"H", U_H, true, 0, 0}, {"S", U_SIEMENS, true, 0, 0},
    {"dB", U_DB, false, 0, 0}, {"%", U_PERCENT, false, 0, -2},
    {"deg", U_DEG, false, 0, 0}, {"\u00b0", U_DEG, false, 0, 0},
    {"bits", U_BITS, false, 0, 0}, {"bit", U_BITS, false, 0, 0},
    {"bytes", U_BYTES, false, 0, 0}, {"byte", U_BYTES, false, 0, 0}, {"B", U_BYTES, false, 0, 0},
    {"kB", U_BYTES, false, 0, 3}, {"MB", U_BYTES, false, 0, 6},
    {"KiB", U_BYTES, false, 1024, 0}, {"MiB", U_BYTES, false, 1048576, 0},
};
#define UNITS (sizeof units / sizeof units[0])

static const char *const unit_phrase[] = {
    [U_NONE] = "a plain number", [U_HZ] = "a frequency", [U_RAD_S] = "a frequency", [U_S] = "a time",
    [U_V] = "a voltage", [U_A] = "a current", [U_OHM] = "a resistance", [U_F] = "a capacitance",
    [U_H] = "an inductance", [U_SIEMENS] = "a conductance", [U_DB] = "decibels",
    [U_PERCENT] = "a percentage", [U_DEG] = "an angle", [U_BITS] = "a number of bits", [U_BYTES] = "a size",
};

typedef struct prefix { const char *name; int exponent; } prefix;

static const prefix prefixes[] = {
    {"f", -15}, {"p", -12}, {"n", -9}, {"u", -6}, {"\u00b5", -6}, {"\u03bc", -6}, {"m", -3},
    {"k", 3}, {"K", 3}, {"M", 6}, {"G", 9}, {"T", 12},
};
#define PREFIXES (sizeof prefixes / sizeof prefixes[0])

/* A decimal as written: its digits with at most one point, and the power of ten they stand for. */
typedef struct decimal { char digits[LONGEST + 8]; int exponent; } decimal;

/* ---- pieces of text ---- */

char *pw_shown(char *buffer, const char *text)
{
    const size_t most = 40;
    size_t n = 0;
    while (text[n] && n < most) n++;
    if (text[n])
        while (n && ((unsigned char)text[n] & 0xc0) == 0x80) n--;
    snprintf(buffer, PW_SHOWN_ROOM, "'%.*s%s'", (int)n, text, text[n] ? ".." : "");
    for (char *p = buffer; *p; p++)
        if ((unsigned char)*p < ' ') *p = ' ';
    return buffer;
}

const char *pw_skip_blanks(const char *p)
{
    static const char *const wide[] = {"\u00a0", "\u2009", "\u202f"};
    for (;;) {
        size_t n = *p == ' ' || *p == '\t' || *p == '\n' || *p == '\r';
        for (size_t i = 0; !n && i < sizeof wide / sizeof wide[0]; i++)
            if (!strncmp(p, wide[i], strlen(wide[i]))) n = strlen(wide[i]);
        if (!n) return p;
        p += n;
    }
}

/* One more than the length of a sign at p: "+", "-" or U+2212. */
static size_t sign_length(const char *p)
{
    if (*p == '+' || *p == '-') return 1;
    return strncmp(p, "\u2212", 3) ? 0 : 3;
}

static const char *digits_end(const char *p)
{
    while (isdigit((unsigned char)*p)) p++;
    return p;
}

const char *pw_decimal_end(const char *p)
{
    const char *whole = p + sign_length(p), *at = digits_end(whole);
    size_t digits = (size_t)(at - whole);
    if (*at == '.') {
        const char *end = digits_end(at + 1);
        digits += (size_t)(end - at - 1);
        at = end;
    }
    if (!digits) return p;
    if (*at == 'e' || *at == 'E') {
        const char *power = at + 1 + (at[1] == '+' || at[1] == '-');
        const char *end = digits_end(power);
        if (end > power) at = end;
    }
    return at;
}

/* Takes the decimal between two places apart. */
static void take_decimal(const char *p, const char *end, decimal *out)
{
    size_t sign = sign_length(p), n = 0;
    if (sign && *p != '+') out->digits[n++] = '-';
    for (p += sign; p < end && *p != 'e' && *p != 'E'; p++) out->digits[n++] = *p;
    out->digits[n] = 0;
    long power = p < end ? strtol(p + 1, NULL, 10) : 0;
    out->exponent = power > MOST_EXPONENT ? MOST_EXPONENT : power < -MOST_EXPONENT ? -MOST_EXPONENT : (int)power;
}

/* The nearest double; false, with a fault, where there is none. */
static bool convert(const decimal *d, const char *text, double *value, pw_quantity_fault *fault)
{
    char all[LONGEST + 32], shown[PW_SHOWN_ROOM];
    snprintf(all, sizeof all, "%se%d", d->digits, d->exponent);
    *value = strtod(all, NULL);
    bool zero = !d->digits[strcspn(d->digits, "123456789")];
    if (isfinite(*value) && (zero || fabs(*value) >= 1e-300)) return true;
    snprintf(fault->what, sizeof fault->what, "%s is too %s for any number here", pw_shown(shown, text),
             isfinite(*value) ? "small" : "large");
    return false;
}

/* ---- units ---- */

static bool same(const char *a, const char *b) { return !strcmp(a, b); }

/* The unit that a text names, with the decimal exponent of its prefix; null for none known. */
static const unit *find_unit(const char *text, int *exponent)
{
    static const unit bare = {"", U_NONE, true, 0, 0};
    *exponent = 0;
    if (!*text) return &bare;
    for (size_t i = 0; i < UNITS; i++)
        if (same(text, units[i].name)) return &units[i];
    for (size_t i = 0; i < PREFIXES; i++) {
        size_t n = strlen(prefixes[i].name);
        if (strncmp(text, prefixes[i].name, n)) continue;
        *exponent = prefixes[i].exponent;
        if (!text[n]) return &bare;
        for (size_t k = 0; k < UNITS; k++)
            if (units[k].prefixes && same(text + n, units[k].name)) return &units[k];
    }
    return NULL;
}

/* What value of the wanted dimension one of this unit is; 0 where it is of another dimension. */
static double factor(pw_dimension want, unit_kind kind)
{
    static const unit_kind own[PW_DIMENSIONS] = {
        [PW_DIM_NUMBER] = U_NONE, [PW_DIM_RATIO] = U_NONE, [PW_DIM_DECIBEL] = U_DB,
        [PW_DIM_FREQUENCY] = U_HZ, [PW_DIM_ANGULAR] = U_RAD_S, [PW_DIM_TIME] = U_S,
        [PW_DIM_VOLTAGE] = U_V, [PW_DIM_CURRENT] = U_A, [PW_DIM_RESISTANCE] = U_OHM,
        [PW_DIM_CAPACITANCE] = U_F, [PW_DIM_INDUCTANCE] = U_H, [PW_DIM_CONDUCTANCE] = U_SIEMENS,
        [PW_DIM_ANGLE] = U_DEG, [PW_DIM_FRACTION] = U_PERCENT, [PW_DIM_BITS] = U_BITS,
        [PW_DIM_BYTES] = U_BYTES,
    };
    if (kind == U_NONE || kind == own[want]) return 1;
    if (want == PW_DIM_RATIO && kind == U_DB) return 1;
    if (want == PW_DIM_FREQUENCY && kind == U_RAD_S) return 1 / (2 * M_PI);
    if (want == PW_DIM_ANGULAR && kind == U_HZ) return 2 * M_PI;
    return 0;
}

static void name_nearest_unit(const char *text, pw_dimension want, pw_quantity_fault *fault)
{
    static const char *const scales[] = {"", "k", "M", "m", "u", "n", "p", "G"};
    enum { SCALES = sizeof scales / sizeof scales[0] };
    char names[UNITS * SCALES][16];
    const char *known[UNITS * SCALES];
    int n = 0;
    for (size_t i = 0; i < UNITS; i++)
        for (size_t k = 0; k < (units[i].prefixes ? (size_t)SCALES : 1); k++) {
            if (factor(want, units[i].kind) == 0) continue;
            snprintf(names[n], sizeof names[n], "%s%s", scales[k], units[i].name);
            known[n] = names[n];
            n++;
        }
    const char *near = pw_nearest(text, known, n);
    if (near) snprintf(fault->near, sizeof fault->near, "%s", near);
}

static bool wrong_unit(const char *text, const char *tail, pw_dimension want, const unit *of,
                       pw_quantity_fault *fault)
{
    char shown[PW_SHOWN_ROOM], shown_tail[PW_SHOWN_ROOM];
    pw_shown(shown, text);
    if (!of) {
        snprintf(fault->what, sizeof fault->what, "unknown unit %s in %s", pw_shown(shown_tail, tail), shown);
        name_nearest_unit(tail, want, fault);
    } else
        snprintf(fault->what, sizeof fault->what, "%s is %s", shown,
                 of->kind == U_NONE ? "a number with a prefix that means nothing here"
                                      : unit_phrase[of->kind]);
    return false;
}

/* ---- codes ---- */

static const prefix points[] = {
    {"R", 0}, {"F", 0}, {"H", 0}, {"L", -3}, {"p", -12}, {"n", -9}, {"u", -6}, {"\u00b5", -6},
    {"\u03bc", -6}, {"m", -3}, {"k", 3}, {"K", 3}, {"M", 6}, {"G", 9}, {"T", 12},
};

/* Reads "4k7", "R47" or "47R" (IEC 60062): a letter where the point stands. Null where text is
 * none; else the letter, the decimal, and what follows. */
static const prefix *take_code(const char *text, decimal *out, const char **tail)
{
    size_t sign = sign_length(text);
    const char *whole = text + sign, *at = digits_end(whole);
    for (size_t i = 0; i < sizeof points / sizeof points[0]; i++) {
        size_t n = strlen(points[i].name);
        if (strncmp(at, points[i].name, n)) continue;
        const char *rest = at + n, *end = digits_end(rest);
        bool point_like = end > rest || strchr("RL", points[i].name[0]);
        if (!point_like || (at == whole && end == rest)) return NULL;
        snprintf(out->digits, sizeof out->digits, "%s%.*s.%.*s", sign && *text != '+' ? "-" : "",
                 (int)(at - whole), whole, (int)(end - rest), rest);
        out->exponent = points[i].exponent;
        *tail = pw_skip_blanks(end);
        return &points[i];
    }
    return NULL;
}

static bool code_allowed(const prefix *point, pw_dimension want)
{
    unsigned char letter = (unsigned char)point->name[0];
    return strchr(dimensions[want].codes, letter < 0x80 ? letter : 'u') && *dimensions[want].codes;
}

static bool wrong_code(const char *text, const prefix *point, pw_dimension want, pw_quantity_fault *fault)
{
    char shown[PW_SHOWN_ROOM];
    pw_shown(shown, text);
    if (!*dimensions[want].codes)
        snprintf(fault->what, sizeof fault->what, "%s is a part code, which stands for a part value only", shown);
    else
        snprintf(fault->what, sizeof fault->what, "%s is not the code of %s ('%s' cannot stand for its point)",
                 shown, dimensions[want].phrase, point->name);
    return false;
}

/* ---- the whole ---- */

static bool not_a_number(const char *text, pw_quantity_fault *fault)
{
    static const char *const infinite[] = {"inf", ".inf", "infinity", "infinite", "nan", ".nan"};
    char shown[PW_SHOWN_ROOM];
    const char *p = text + sign_length(text);
    bool finite = true;
    for (size_t i = 0; i < sizeof infinite / sizeof infinite[0]; i++)
        if (!strcasecmp(p, infinite[i])) finite = false;
    snprintf(fault->what, sizeof fault->what, "%s is not a %snumber", pw_shown(shown, text), finite ? "" : "finite ");
    return false;
}

static bool finish(double times, pw_dimension want, unit_kind kind, double *value)
{
    if (want == PW_DIM_RATIO && kind == U_DB) *value = pow(10, *value / 20);
    if (times == 1 / (2 * M_PI)) *value /= 2 * M_PI;
    else *value *= times;
    return isfinite(*value);
}

bool pw_quantity_read(const char *text, pw_dimension want, double *value, pw_quantity_fault *fault)
{
    char trimmed[LONGEST + 1], shown[PW_SHOWN_ROOM];
    decimal d;
    const char *tail;
    *fault = (pw_quantity_fault){0};
    text = pw_skip_blanks(text);
    size_t n = strlen(text);
    while (n && strchr(" \t\r\n", text[n - 1])) n--;
    if (n > LONGEST) return not_a_number(text, fault);
    memcpy(trimmed, text, n);
    trimmed[n] = 0;
    const prefix *point = take_code(trimmed, &d, &tail);
    if (point && !code_allowed(point, want)) return wrong_code(trimmed, point, want, fault);
    if (!point) {
        const char *end = pw_decimal_end(trimmed);
        if (end == trimmed) return not_a_number(trimmed, fault);
        take_decimal(trimmed, end, &d);
        tail = pw_skip_blanks(end);
    }
    if (*tail == ',' || (isdigit((unsigned char)*tail)) || *tail == '.') return not_a_number(trimmed, fault);
    int exponent;
    const unit *of = find_unit(tail, &exponent);
    double times = of ? factor(want, of->kind) : 0;
    bool bare_prefix = of && of->kind == U_NONE && *tail;
    if (times == 0 || (bare_prefix && (point || !dimensions[want].prefixed)))
        return wrong_unit(trimmed, tail, want, of, fault);
    d.exponent += exponent + of->exponent;
    if (!convert(&d, trimmed, value, fault)) return false;
    if (finish(of->times > 0 ? times * of->times : times, want, of->kind, value)) return true;
    snprintf(fault->what, sizeof fault->what, "%s is too large for any number here", pw_shown(shown, trimmed));
    return false;
}
