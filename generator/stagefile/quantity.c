/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "stagefile/quantity.h"

#include <ctype.h>
#include <errno.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/nearest.h"
#include "stagefile/units.h"

#define LONGEST 200              /* bytes of a quantity; longer text is none */
#define MOST_UNITS 32            /* in the table, for the nearest one */
#define MOST_EXPONENT 9999       /* beyond any double, and small enough to add to */

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
    out->exponent = power > MOST_EXPONENT    ? MOST_EXPONENT
                    : power < -MOST_EXPONENT ? -MOST_EXPONENT
                                             : (int)power;
}

/* The nearest double; false, with a fault, where there is none. */
static bool convert(const decimal *d, const char *text, double *value, pw_quantity_fault *fault)
{
    char all[LONGEST + 32], shown[PW_SHOWN_ROOM];
    snprintf(all, sizeof all, "%se%d", d->digits, d->exponent);
    *value = strtod(all, NULL);
    bool zero = !d->digits[strcspn(d->digits, "123456789")];
    if (isfinite(*value) && (zero || fabs(*value) >= 1e-300)) return true;
    snprintf(fault->what, sizeof fault->what, "%s is too %s for any number here",
             pw_shown(shown, text), isfinite(*value) ? "small" : "large");
    return false;
}

/* ---- units ---- */

static void name_nearest_unit(const char *text, pw_dimension want, pw_quantity_fault *fault)
{
    static const char *const scales[] = {"", "k", "M", "m", "u", "n", "p", "G"};
    enum { SCALES = sizeof scales / sizeof scales[0] };
    char names[MOST_UNITS * SCALES][16];
    const char *known[MOST_UNITS * SCALES];
    int n = 0;
    for (size_t i = 0; i < (size_t)pw_unit_count; i++)
        for (size_t k = 0; k < (pw_units[i].prefixes ? (size_t)SCALES : 1); k++) {
            if (pw_unit_factor(want, pw_units[i].kind) == 0) continue;
            snprintf(names[n], sizeof names[n], "%s%s", scales[k], pw_units[i].name);
            known[n] = names[n];
            n++;
        }
    const char *near = pw_nearest(text, known, n);
    if (near) snprintf(fault->near, sizeof fault->near, "%s", near);
}

static bool wrong_unit(const char *text, const char *tail, pw_dimension want, const pw_unit *of,
                       pw_quantity_fault *fault)
{
    char shown[PW_SHOWN_ROOM], shown_tail[PW_SHOWN_ROOM];
    pw_shown(shown, text);
    if (!of) {
        snprintf(fault->what, sizeof fault->what, "unknown unit %s in %s",
                 pw_shown(shown_tail, tail), shown);
        name_nearest_unit(tail, want, fault);
    } else
        snprintf(fault->what, sizeof fault->what, "%s is %s", shown,
                 pw_unit_phrase(of->kind));
    return false;
}

/* ---- codes ---- */

/* Reads "4k7", "R47" or "47R" (IEC 60062): a letter where the point stands. Null where text is
 * none; else the letter, the decimal, and what follows. */
static const pw_prefix *take_code(const char *text, decimal *out, const char **tail)
{
    size_t sign = sign_length(text);
    const char *whole = text + sign, *at = digits_end(whole);
    for (int i = 0; i < pw_point_letter_count; i++) {
        size_t n = strlen(pw_point_letters[i].name);
        if (strncmp(at, pw_point_letters[i].name, n)) continue;
        const char *rest = at + n, *end = digits_end(rest);
        bool point_like = end > rest || strchr("RL", pw_point_letters[i].name[0]);
        if (!point_like || (at == whole && end == rest)) return NULL;
        snprintf(out->digits, sizeof out->digits, "%s%.*s.%.*s", sign && *text != '+' ? "-" : "",
                 (int)(at - whole), whole, (int)(end - rest), rest);
        out->exponent = pw_point_letters[i].exponent;
        *tail = pw_skip_blanks(end);
        return &pw_point_letters[i];
    }
    return NULL;
}

static bool wrong_code(const char *text, const pw_prefix *point, pw_dimension want,
                       pw_quantity_fault *fault)
{
    char shown[PW_SHOWN_ROOM];
    pw_shown(shown, text);
    if (!pw_dimension_has_codes(want))
        snprintf(fault->what, sizeof fault->what,
                 "%s is a part code, which stands for a part value only", shown);
    else
        snprintf(fault->what, sizeof fault->what,
                 "%s is not the code of %s ('%s' cannot stand for its point)", shown,
                 pw_dimension_phrase(want), point->name);
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
    snprintf(fault->what, sizeof fault->what, "%s is not a %snumber", pw_shown(shown, text),
             finite ? "" : "finite ");
    return false;
}

static bool finish(double times, pw_dimension want, pw_unit_kind kind, double *value)
{
    if (want == PW_DIM_RATIO && kind == PW_UNIT_DB) *value = pow(10, *value / 20);
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
    const pw_prefix *point = take_code(trimmed, &d, &tail);
    if (point && !pw_dimension_takes_code(want, point))
        return wrong_code(trimmed, point, want, fault);
    if (!point) {
        const char *end = pw_decimal_end(trimmed);
        if (end == trimmed) return not_a_number(trimmed, fault);
        take_decimal(trimmed, end, &d);
        tail = pw_skip_blanks(end);
    }
    if (*tail == ',' || (isdigit((unsigned char)*tail)) || *tail == '.')
        return not_a_number(trimmed, fault);
    int exponent;
    const pw_unit *of = pw_unit_find(tail, &exponent);
    double times = of ? pw_unit_factor(want, of->kind) : 0;
    bool bare_prefix = of && of->kind == PW_UNIT_NONE && *tail;
    if (times == 0 || (bare_prefix && (point || !pw_dimension_takes_bare_prefix(want))))
        return wrong_unit(trimmed, tail, want, of, fault);
    d.exponent += exponent + of->exponent;
    if (!convert(&d, trimmed, value, fault)) return false;
    if (finish(of->times > 0 ? times * of->times : times, want, of->kind, value)) return true;
    snprintf(fault->what, sizeof fault->what, "%s is too large for any number here",
             pw_shown(shown, trimmed));
    return false;
}
