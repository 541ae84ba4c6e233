/* SPDX-License-Identifier: GPL-3.0-or-later */
/* <stage>_from_code and <stage>_to_code: converter codes to samples and back.
 *
 * Code c of a converter of n bits is low + c (high - low) / 2^n volts; a sample w stands for
 * zero + w full_scale volts. Both ways are one line, slope and offset; for fixed point these are
 * integers with the fewest fraction bits that are exact, or as many as 64-bit products allow (then
 * the result is the nearest but for ties nearer than 2^(n-28) of a step). */
#include <math.h>

#include "emit/emission.h"

typedef struct pw_line {
    long double slope, offset;
} pw_line;

static const char *code_type(int bits) { return bits <= 16 ? "uint16_t" : "uint32_t"; }

/* Code -> sample, in samples (words for fixed point). */
static pw_line from_code(const pw_emission *e, const pw_port *port)
{
    long double unit = (e->fixed ? ldexpl(1, e->bits - 1) : 1) / (long double)port->full_scale;
    return (pw_line){unit * ((long double)port->high - port->low) * ldexpl(1, -port->bits),
                     unit * ((long double)port->low - port->zero)};
}

/* Sample -> code. */
static pw_line to_code(const pw_emission *e, const pw_port *port)
{
    long double per_volt = ldexpl(1, port->bits) / ((long double)port->high - port->low);
    long double unit = e->fixed ? ldexpl(1, 1 - e->bits) : 1;
    return (pw_line){per_volt * port->full_scale * unit,
                     per_volt * ((long double)port->zero - port->low)};
}

/* Whether v is whole but for the rounding of the volts it comes from, even after 2^most steps. */
static bool is_whole(long double v, int most)
{
    return fabsl(v - rintl(v)) <= fmaxl(1e-15L * fabsl(v), ldexpl(1, -most - 12));
}

/* Fraction bits for a line whose input reaches 2^most: the fewest that are exact, else the most
 * that keep products and sums below 2^62. */
static int fraction_of(pw_line line, int most)
{
    long double largest = fabsl(line.slope) * ldexpl(1, most) + fabsl(line.offset) + 1;
    int limit = 0;
    while (limit < 61 && ldexpl(largest, limit + 1) < ldexpl(1, 62)) limit++;
    for (int f = 0; f < limit; f++)
        if (is_whole(ldexpl(line.slope, f), most) && is_whole(ldexpl(line.offset, f), 0)) return f;
    return limit;
}

/* "const TYPE v = (IN * slope + offset) >> shift;" with its constants at file scope before f. */
static void fixed_line(const pw_emission *e, pw_code *file, pw_code *f, const char *name,
                       const char *in, pw_line line, int most)
{
    int fraction = fraction_of(line, most);
    long double half = fraction > 0 ? ldexpl(1, fraction - 1) : 0;
    long double reach = ldexpl(fabsl(line.slope), most + fraction)
                        + fabsl(ldexpl(line.offset, fraction)) + half;
    const char *type = reach < ldexpl(1, 31) && most < 32 ? "int32_t" : "int64_t";
    const char *shift = fraction > 0 ? pw_arena_print(e->arena, " >> $_%s_shift", name) : "";
    pw_constant(file, pw_arena_print(e->arena, "static const %s $_%s_slope", type, name),
                pw_word(llrintl(ldexpl(line.slope, fraction))),
                pw_arena_print(e->arena, "%.15Lg a step", line.slope));
    pw_constant(file, pw_arena_print(e->arena, "static const %s $_%s_offset", type, name),
                pw_word(llrintl(ldexpl(line.offset, fraction) + half)),
                pw_arena_print(e->arena,
                               fraction > 0 ? "%.15Lg, and half a unit to round" : "%.15Lg",
                               line.offset));
    if (fraction > 0)
        pw_constant(file, pw_arena_print(e->arena, "static const int16_t $_%s_shift", name),
                    pw_word(fraction), "fraction bits of both");
    pw_put(f, pw_arena_print(e->arena, "const %s v = ((%s)%s * $_%s_slope + $_%s_offset)%s;", type,
                             type, in, name, name, shift));
}

static void float_line(const pw_emission *e, pw_code *file, pw_code *f, const char *name,
                       const char *in, pw_line line)
{
    pw_constant(file, pw_arena_print(e->arena, "static const @ $_%s_slope", name),
                pw_real((double)line.slope, e->single), NULL);
    pw_constant(file, pw_arena_print(e->arena, "static const @ $_%s_offset", name),
                pw_real((double)line.offset, e->single), NULL);
    pw_put(f,
           pw_arena_print(e->arena, "const @ v = %s * $_%s_slope + $_%s_offset;", in, name, name));
}

/* Constants first, then the function: the file gets both in order. */
static pw_code *function(pw_code *file, const char *head, pw_code **constants)
{
    pw_blank(file);
    *constants = pw_section_group(file, 0);
    pw_blank(file);
    return pw_function(file, head);
}

static void emit_from_code(const pw_emission *e, const pw_port *port, pw_code *header,
                           pw_code *source)
{
    const char *head = pw_arena_print(e->arena, "@ $_from_code(%s code)", code_type(port->bits));
    pw_code *constants, *f = function(source, head, &constants);
    pw_blank(header);
    pw_prose(pw_comment(header),
             "The sample of a %d-bit converter code: code c is %.9g + c %.9g / 2^%d V, of which the"
             " bias of %.9g V is taken off.",
             port->bits, port->low, port->high - port->low, port->bits, port->zero);
    pw_put(header, pw_arena_print(e->arena, "%s;", head));
    if (e->fixed) {
        fixed_line(e, constants, f, "from_code", "code", from_code(e, port), port->bits);
        pw_put(f,
               pw_arena_print(e->arena, "if (v > INT%d_MAX) return INT%d_MAX;", e->bits, e->bits));
        pw_put(f, pw_arena_print(e->arena, "return v < INT%d_MIN ? INT%d_MIN : (@)v;", e->bits,
                                 e->bits));
    } else {
        float_line(e, constants, f, "from_code", "(@)code", from_code(e, port));
        pw_put(f, "return v;");
    }
}

/* The first and the last code that may go out: rails, nearest codes, within the converter's range.
 * */
static void code_range(const pw_port *port, int64_t range[2])
{
    int64_t last = (INT64_C(1) << port->bits) - 1;
    range[0] = 0;
    range[1] = last;
    for (int i = 0; i < 2 && port->has_rails; i++) {
        long double code = ((long double)port->rail[i] - port->low)
                           / ((long double)port->high - port->low);
        int64_t nearest = (int64_t)floorl(
            fminl(fmaxl(ldexpl(code, port->bits), 0), (long double)last) + 0.5L);
        range[i] = nearest > last ? last : nearest;
    }
}

static void float_to_code(const pw_emission *e, pw_code *f, const char *type)
{
    pw_put_with(
        f, pw_arena_print(e->arena, "if (!(v > (@)$_first_code)) return (%s)$_first_code;", type),
        "NaN too");
    pw_put(f, pw_arena_print(e->arena, "if (v >= (@)$_last_code) return (%s)$_last_code;", type));
    pw_put(f, pw_arena_print(e->arena, "const %s whole = (%s)v;", type, type));
    pw_put(f, pw_arena_print(e->arena, "return (%s)(v - (@)whole >= (@)0.5 ? whole + 1 : whole);",
                             type));
}

static void emit_to_code(const pw_emission *e, const pw_port *port, pw_code *header,
                         pw_code *source)
{
    const char *type = code_type(port->bits);
    const char *head = pw_arena_print(e->arena, "%s $_to_code(@ y)", type);
    pw_code *constants, *f = function(source, head, &constants);
    int64_t range[2];
    code_range(port, range);
    pw_blank(header);
    pw_prose(pw_comment(header),
             "The nearest %d-bit converter code of a sample, the bias of %.9g V added, held between"
             " code %lld and code %lld%s.",
             port->bits, port->zero, (long long)range[0], (long long)range[1],
             port->has_rails ? " (the rails)" : "");
    pw_put(header, pw_arena_print(e->arena, "%s;", head));
    const char *bound = pw_arena_print(e->arena, "static const %s",
                                       port->bits < 32 ? "int32_t" : "int64_t");
    pw_constant(constants, pw_arena_print(e->arena, "%s $_first_code", bound), pw_word(range[0]),
                NULL);
    pw_constant(constants, pw_arena_print(e->arena, "%s $_last_code", bound), pw_word(range[1]),
                NULL);
    if (!e->fixed) {
        float_line(e, constants, f, "to_code", "y", to_code(e, port));
        float_to_code(e, f, type);
        return;
    }
    fixed_line(e, constants, f, "to_code", "y", to_code(e, port), e->bits - 1);
    pw_put(f, pw_arena_print(e->arena, "if (v < $_first_code) return (%s)$_first_code;", type));
    pw_put(f, pw_arena_print(e->arena, "return (%s)(v > $_last_code ? $_last_code : v);", type));
}

void pw_emit_converters(const pw_emission *e, pw_code *header, pw_code *source)
{
    const pw_stage *stage = e->results->stage;
    if (stage->input.given && stage->input.bits > 0)
        emit_from_code(e, &stage->input, header, source);
    if (stage->output.given && stage->output.bits > 0)
        emit_to_code(e, &stage->output, header, source);
}
