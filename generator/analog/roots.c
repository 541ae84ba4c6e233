/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analog/rootlist.h"
#include "base/text.h"

#include <math.h>

typedef bool (*pw_add)(pw_roots *, double complex, pw_where, pw_messages *);

/* Adds what the entries stand for; a pair with q <= 0.5 is two real roots. */
static bool add_all(const pw_root *entry, int entries, pw_add add, pw_roots *out,
                    pw_messages *messages)
{
    for (int i = 0; i < entries; i++, entry++)
        if (!add(out, entry->double_real ? creal(entry->s) : entry->s, entry->at, messages)
            || (entry->double_real && !add(out, entry->s2, entry->at, messages)))
            return false;
    return true;
}

static bool check_all(const pw_root *entry, int entries, pw_messages *messages)
{
    bool good = true;
    for (int i = 0; i < entries; i++, entry++) {
        double complex first = entry->double_real ? creal(entry->s) : entry->s;
        good = pw_roots_check_pole(first, entry->at, messages) && good;
        if (entry->double_real)
            good = pw_roots_check_pole(entry->s2, entry->at, messages) && good;
    }
    return good;
}

/* The factor that gives the wanted gain at a frequency: at 0 Hz the product over the roots is real
 * and H(0) itself is set, elsewhere its modulus. */
static bool gain_at(const pw_gain *gain, pw_roots *out, pw_messages *messages)
{
    char hz[PW_NUMBER_ROOM];
    long double w = 2 * 3.14159265358979323846264338327950288L * gain->at_hz;
    long double complex product = pw_roots_product_at(out, CMPLXL(0, w));
    long double size = w == 0 ? creall(product) : cabsl(product);
    pw_si(hz, gain->at_hz, "Hz", 6);
    if (size == 0) {
        pw_error(messages, gain->at,
                 "the gain at %s is 0 whatever the factor, for there is a zero; "
                 "expected a frequency away from the zeros", hz);
        return false;
    }
    if (!isfinite(size)) {
        pw_error(messages, gain->at, "the gain at %s is infinite, for there is a pole; "
                 "expected a frequency away from the poles", hz);
        return false;
    }
    out->factor = gain->is / size;
    return true;
}

static bool set_factor(const pw_gain *gain, pw_roots *out, pw_messages *messages)
{
    if ((gain->kind == PW_GAIN_FACTOR ? gain->factor : gain->is) == 0) {
        pw_error(messages, gain->at, "a gain of 0 leaves no stage; expected a gain other than 0");
        return false;
    }
    out->factor = gain->factor;
    if (gain->kind == PW_GAIN_AT && !gain_at(gain, out, messages))
        return false;
    if (gain->invert)
        out->factor = -out->factor;
    return true;
}

pw_status pw_analog_from_roots(const pw_analog_spec *spec, pw_roots *out, pw_messages *messages)
{
    *out = (pw_roots){.factor = 1};
    bool good = check_all(spec->pole, spec->poles, messages);
    if (!add_all(spec->pole, spec->poles, pw_roots_add_pole, out, messages)
        || !add_all(spec->zero, spec->zeros, pw_roots_add_zero, out, messages))
        return PW_WRONG;
    good = set_factor(&spec->gain, out, messages) && good;
    return good ? PW_OK : PW_WRONG;
}
