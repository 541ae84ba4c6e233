/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The JSON Schema of the stage file, for editors. */
#ifndef PW_STAGEFILE_SCHEMA_H
#define PW_STAGEFILE_SCHEMA_H

#include "base/text.h"

/* A JSON Schema (draft 2020-12) made from the table of keys, with descriptions, defaults and
 * examples. It accepts every file that the reader accepts; what needs more than one look at one
 * place (a frequency against the rate, roots against roots) is the reader's alone. */
void pw_schema_write(pw_text *out);

#endif
