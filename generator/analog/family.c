/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analog/wide.h"
#include "analog/prototype.h"

#define MAX_ORDER 20

/* What a family needs and takes. */
typedef struct pw_traits { bool ripple, stopband, normalise, even; } pw_traits;

static const pw_traits traits[] = {
    [PW_BUTTERWORTH]        = {0},
    [PW_CHEBYSHEV]          = {.ripple = true},
    [PW_INVERSE_CHEBYSHEV]  = {.stopband = true},
    [PW_ELLIPTIC]           = {.ripple = true, .stopband = true},
    [PW_BESSEL]             = {.normalise = true},
    [PW_CRITICALLY_DAMPED]  = {0},
    [PW_LINKWITZ_RILEY]     = {.even = true},
};

static bool is_band(const pw_family *family)
{
    return family->shape == PW_BANDPASS || family->shape == PW_BANDSTOP;
}

/* One of ripple and stopband: there where it is needed, positive, and absent elsewhere. */
static bool check_depth(const pw_given *depth, bool needed, const char *name,
                        const char *where_used, const pw_family *family, pw_messages *messages)
{
    if (needed && !depth->given)
        pw_error(messages, family->at,
                 "%s is missing; expected a depth in dB, for this approximation "
                 "has no default for it", name);
    else if (!needed && depth->given)
        pw_error(messages, depth->at,
                 "this approximation has no %s; expected it with %s only", name,
                 where_used);
    else if (depth->given && !(depth->value > 0))
        pw_error(messages, depth->at,
                 "%s must be above 0 dB; expected a positive depth, for instance "
                 "0.5 dB", name);
    else
        return true;
    return false;
}

static bool check_order(const pw_family *family, pw_messages *messages)
{
    if (family->order < 1 || family->order > MAX_ORDER)
        pw_error(messages, family->order_at,
                 "order %d is out of range; expected 1 to %d", family->order,
                 MAX_ORDER);
    else if (traits[family->approximation].even && family->order % 2)
        pw_error(messages, family->order_at, "order %d is odd, and linkwitz-riley is a butterworth "
                 "stage squared; expected an even order", family->order);
    else
        return true;
    return false;
}

static bool check_corners(const pw_family *family, pw_messages *messages)
{
    bool good = true;
    for (int i = 0; i < (is_band(family) ? 2 : 1); i++)
        if (!(family->corner_hz[i] > 0)) {
            pw_error(messages, family->corner_at[i],
                     "a corner must be above 0 Hz; expected a frequency "
                     "such as 1 kHz");
            good = false;
        }
    if (good && is_band(family) && !(family->corner_hz[0] < family->corner_hz[1])) {
        pw_error(messages, family->corner_at[1],
                 "the corners do not ascend; expected the lower one first, "
                 "and two different ones");
        good = false;
    }
    return good;
}

/* corner-at against the depths between which the response falls once and for all. */
static bool check_corner_depth(const pw_family *family, pw_messages *messages)
{
    const pw_given *depth = &family->corner_at_db;
    if (!depth->given)
        return true;
    if (!(depth->value > 0))
        pw_error(messages, depth->at,
                 "corner-at must be above 0 dB; expected a positive depth, for "
                 "instance 1 dB");
    else if (family->normalise != PW_NORMALISE_MAGNITUDE)
        pw_error(messages, depth->at,
                 "corner-at goes with normalise: magnitude only; expected one of "
                 "the two to be left out");
    else if (family->ripple_db.given && depth->value < family->ripple_db.value)
        pw_error(messages, depth->at,
                 "corner-at is less than the ripple, a depth that the pass band "
                 "crosses many times; expected %g dB or more", family->ripple_db.value);
    else if (family->stopband_db.given && depth->value >= family->stopband_db.value)
        pw_error(messages, depth->at, "corner-at lies in the stop band; expected less than %g dB",
                 family->stopband_db.value);
    else
        return true;
    return false;
}

/* The default corner of inverse-chebyshev is 3.01 dB deep, so its stop band must be deeper. */
static bool check_stopband(const pw_family *family, pw_messages *messages)
{
    double least = family->approximation == PW_ELLIPTIC ? family->ripple_db.value
                 : family->corner_at_db.given ? 0 : 10 * log10(2);
    if (!family->stopband_db.given || family->stopband_db.value > least)
        return true;
    pw_error(messages, family->stopband_db.at,
             "the stop band is not below the pass band; expected more "
             "than %.4g dB", least);
    return false;
}

static bool check(const pw_family *family, pw_messages *messages)
{
    pw_traits takes = traits[family->approximation];
    bool good = check_order(family, messages);
    good = check_corners(family, messages) && good;
    bool depths = check_depth(&family->ripple_db, takes.ripple, "ripple", "chebyshev and elliptic",
                              family, messages);
    depths = check_depth(&family->stopband_db, takes.stopband, "stopband",
                         "inverse-chebyshev and elliptic", family, messages) && depths;
    if (depths)
        depths = check_stopband(family, messages) && check_corner_depth(family, messages);
    if (!takes.normalise && family->normalise != PW_NORMALISE_MAGNITUDE) {
        pw_error(messages, family->at,
                 "normalise goes with bessel only; expected it to be left out");
        good = false;
    }
    return good && depths;
}

/* The frequency past the pass band where the gain has fallen to target. In the pass band the gain
 * is above target, and from its end to the first zero it falls steadily. */
static pw_wide falls_to(const pw_prototype *prototype, pw_wide target)
{
    pw_wide low = 0, high = 2;
    if (prototype->zeros > 0)
        high = cimagf128(prototype->zero[prototype->zeros - 1]);    /* the nearest one */
    else
        while (pw_prototype_gain(prototype, high) > target)
            high *= 2;
    for (int i = 0; i < 400; i++) {
        pw_wide middle = low + (high - low) / 2;
        if (middle == low || middle == high)
            break;
        if (pw_prototype_gain(prototype, middle) > target)
            low = middle;
        else
            high = middle;
    }
    return low + (high - low) / 2;
}

/* Puts the corner as the family defines it at frequency 1. */
static void put_corner(const pw_family *family, pw_prototype *prototype)
{
    bool moves = family->corner_at_db.given;
    bool rippled = traits[family->approximation].ripple;
    pw_wide target = moves ? expf128(-family->corner_at_db.value * logf128(10) / 20)
                           : sqrtf128(0.5F128);
    if (family->approximation == PW_BESSEL && family->normalise == PW_NORMALISE_DELAY)
        return;
    if (family->approximation == PW_BESSEL && family->normalise == PW_NORMALISE_PHASE) {
        pw_wide product = pw_prototype_pole_product(prototype);
        pw_prototype_scale(prototype, powf128(product, -1 / (pw_wide)family->order));
        return;
    }
    if (moves && rippled && family->corner_at_db.value == family->ripple_db.value)
        return;
    if (moves || family->approximation == PW_BESSEL
        || family->approximation == PW_INVERSE_CHEBYSHEV)
        pw_prototype_scale(prototype, 1 / falls_to(prototype, target));
}

static pw_status make(const pw_family *family, pw_prototype *out, pw_messages *messages)
{
    int order = family->order;
    switch (family->approximation) {
    case PW_BUTTERWORTH:
        pw_prototype_butterworth(order, out);
        break;
    case PW_LINKWITZ_RILEY:
        pw_prototype_linkwitz_riley(order, out);
        break;
    case PW_CRITICALLY_DAMPED:
        pw_prototype_critically_damped(order, out);
        break;
    case PW_CHEBYSHEV:
        pw_prototype_chebyshev(order, family->ripple_db.value, out);
        break;
    case PW_INVERSE_CHEBYSHEV:
        pw_prototype_inverse_chebyshev(order, family->stopband_db.value, out);
        break;
    case PW_BESSEL:
        if (pw_prototype_bessel(order, out))
            break;
        pw_error(messages, family->at, "the poles of bessel's order %d did not converge; expected "
                 "another order", order);
        return PW_FAILED;
    case PW_ELLIPTIC:
        if (pw_prototype_elliptic(order, family->ripple_db.value, family->stopband_db.value, out))
            break;
        pw_error(messages, family->stopband_db.at,
                 "ripple and stopband are too near each other for "
                 "order %d; expected a deeper stop band or a lower order", order);
        return PW_WRONG;
    }
    return PW_OK;
}

pw_status pw_analog_from_family(const pw_family *family, pw_roots *out, pw_messages *messages)
{
    pw_prototype prototype;
    if (!check(family, messages))
        return PW_WRONG;
    pw_status status = make(family, &prototype, messages);
    if (status != PW_OK)
        return status;
    put_corner(family, &prototype);
    pw_prototype_shape(&prototype, family->shape, family->corner_hz, out);
    return PW_OK;
}
