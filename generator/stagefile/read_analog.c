/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The six descriptions of an analog stage. */
#include <stdio.h>
#include <string.h>

#include "stagefile/take.h"

static bool is_map(pw_reader *reader, const pw_key *key, const pw_tree *node)
{
    if (node->kind == PW_TREE_MAP) return true;
    pw_take_refuse(reader, key, node, NULL);
    return false;
}

void pw_take_roots(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    pw_analog_spec *spec = base;
    spec->kind = PW_ANALOG_ROOTS;
    if (is_map(reader, key, node)) pw_take_map(reader, key->sub, node, spec);
}

void pw_take_polynomials(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    pw_analog_spec *spec = base;
    spec->kind = PW_ANALOG_POLYNOMIALS;
    if (is_map(reader, key, node)) pw_take_map(reader, key->sub, node, spec);
}

void pw_take_coefficients(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    pw_analog_spec *spec = base;
    bool numerator = !strcmp(key->name, "numerator"), good = true, zero = true;
    pw_take_place(key, node, base, 0);
    if (!pw_take_is_list(reader, key, node)) return;
    const pw_key item = pw_key_item(key);
    double *list = pw_arena_take(reader->arena, (size_t)node->count * sizeof *list);
    for (int i = 0; i < node->count; i++) {
        good &= pw_take_value(reader, &item, node->item[i], &list[i]);
        zero &= list[i] == 0;
    }
    if (!good) return;
    if (zero) pw_take_refuse(reader, key, node, "every coefficient is 0");
    else if (list[0] == 0)
        pw_take_refuse(reader, &item, node->item[0],
                       "the coefficient of the highest power is 0 (leave it out)");
    *(numerator ? &spec->numerator : &spec->denominator) = list;
    *(numerator ? &spec->numerators : &spec->denominators) = node->count;
}

/* ---- families ---- */

static void check_bessel(pw_reader *reader, const pw_family *family)
{
    if (family->corner_at_db.given && family->normalise != PW_NORMALISE_MAGNITUDE)
        pw_error(reader->messages, family->corner_at_db.at,
                 "family.corner-at has no meaning with normalise: "
                 "%s; it goes with normalise: magnitude",
                 pw_normalise_words[family->normalise].word);
}

static void check_family(pw_reader *reader, const pw_family *family)
{
    if (family->approximation == PW_BESSEL) check_bessel(reader, family);
    if (family->approximation == PW_LINKWITZ_RILEY && family->order % 2)
        pw_error(reader->messages, family->order_at,
                 "family.order: %d is odd; expected an even order "
                 "(linkwitz-riley is two butterworth filters in a row)",
                 family->order);
    if (family->approximation == PW_ELLIPTIC && family->ripple_db.given && family->stopband_db.given
        && family->stopband_db.value <= family->ripple_db.value)
        pw_error(reader->messages, family->stopband_db.at,
                 "family.stopband: %g dB is not above the ripple, "
                 "%g dB; expected decibels such as 60 dB",
                 family->stopband_db.value, family->ripple_db.value);
}

void pw_take_family(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    pw_analog_spec *spec = base;
    spec->kind = PW_ANALOG_FAMILY;
    spec->family.at = node->at;
    if (!is_map(reader, key, node)) return;
    pw_take_map(reader, key->sub, node, &spec->family);
    check_family(reader, &spec->family);
}

/* ---- cascades ---- */

void pw_take_cascade(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    pw_analog_spec *spec = base;
    spec->kind = PW_ANALOG_CASCADE;
    if (!pw_take_is_list(reader, key, node)) return;
    spec->member = pw_arena_take(reader->arena, (size_t)node->count * sizeof *spec->member);
    spec->members = node->count;
    const pw_key item = pw_key_item(key);
    for (int i = 0; i < node->count; i++) {
        spec->member[i].at = node->item[i]->at;
        if (node->item[i]->kind == PW_TREE_MAP)
            pw_take_map(reader, key->sub, node->item[i], &spec->member[i]);
        else pw_take_refuse(reader, &item, node->item[i], NULL);
    }
}
