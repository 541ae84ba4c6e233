/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The units, the prefixes and the letters of part codes, and what each dimension accepts. */
#ifndef PW_STAGEFILE_UNITS_H
#define PW_STAGEFILE_UNITS_H

#include "base/text.h"
#include "stagefile/quantity.h"

typedef enum pw_unit_kind {
    PW_UNIT_NONE,
    PW_UNIT_HZ,
    PW_UNIT_RAD_S,
    PW_UNIT_SECOND,
    PW_UNIT_VOLT,
    PW_UNIT_AMPERE,
    PW_UNIT_OHM,
    PW_UNIT_FARAD,
    PW_UNIT_HENRY,
    PW_UNIT_SIEMENS,
    PW_UNIT_DB,
    PW_UNIT_PERCENT,
    PW_UNIT_DEGREE,
    PW_UNIT_BIT,
    PW_UNIT_BYTE
} pw_unit_kind;

typedef struct pw_unit {
    const char *name;
    pw_unit_kind kind;
    bool prefixes;               /* may carry an SI prefix */
    double times;                /* of the unit of its kind; 0: 1 */
    int exponent;                /* decimal, of the unit of its kind */
} pw_unit;

typedef struct pw_prefix { const char *name; int exponent; } pw_prefix;

extern const pw_unit pw_units[];
extern const int pw_unit_count;
extern const pw_prefix pw_point_letters[];   /* that stand for the point in a code, IEC 60062 */
extern const int pw_point_letter_count;

/* "a voltage". */
const char *pw_unit_phrase(pw_unit_kind kind);

/* The unit that a text names, with the decimal exponent of its prefix; null for none known. */
const pw_unit *pw_unit_find(const char *text, int *exponent);

/* What value of the wanted dimension one of this unit is; 0 where it is of another dimension. */
double pw_unit_factor(pw_dimension want, pw_unit_kind kind);

bool pw_dimension_takes_code(pw_dimension dimension, const pw_prefix *letter);
bool pw_dimension_has_codes(pw_dimension dimension);
bool pw_dimension_takes_bare_prefix(pw_dimension dimension);

/* A regular expression (in the common part of ECMA 262 and others) that the texts of a dimension
 * match and others do not, as far as one can tell; for the schema. */
void pw_dimension_pattern(pw_dimension dimension, bool may_be_negative, bool may_be_zero,
                          pw_text *out);

#endif
