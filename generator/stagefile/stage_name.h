/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the name of a stage may be: it names files, types and functions in C and C++. */
#ifndef PW_STAGEFILE_STAGE_NAME_H
#define PW_STAGEFILE_STAGE_NAME_H

#define PW_STAGE_NAME_LONGEST 48         /* with the longest suffix within C99's 63 characters */

extern const char *const pw_stage_name_words[];   /* of C and C++, ended by a null: refused */
extern const char pw_stage_name_pattern[];        /* a regular expression for all else */

/* Why a text cannot be the name of a stage ("is not a C identifier"); null where it can. */
const char *pw_stage_name_fault(const char *text);

#endif
