/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The manual page of the stage file, polewright-stage(5). */
#ifndef PW_STAGEFILE_MANUAL_H
#define PW_STAGEFILE_MANUAL_H

#include "base/text.h"

/* mdoc source, made from the table of keys: a section a map, an item a key. */
void pw_manual_write(pw_text *out);

#endif
