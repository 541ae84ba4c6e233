/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Text for manual pages. */
#ifndef PW_BASE_ROFF_H
#define PW_BASE_ROFF_H

#include "base/text.h"

/* Adds text as roff reads it literally: hyphens that can be copied, no backslash that escapes, no
 * request at the start of a line. UTF-8 passes. */
void pw_roff_add(pw_text *out, const char *text);

#endif
