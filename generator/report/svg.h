/* SPDX-License-Identifier: GPL-3.0-or-later */
/* gnuplot's SVG made into the report's own: only shapes and text, no colours, ids, fonts, dates or
 * versions. The look comes from the page's style sheet by the role of each element. */
#ifndef PW_REPORT_SVG_H
#define PW_REPORT_SVG_H

#include <stdbool.h>
#include "base/text.h"

/* What an element of a plot is. A script draws it in the colour #0000NN, NN the role in
 * hexadecimal; here it becomes class "rN". Elements of another colour are left out. */
typedef enum pw_role {
    PW_ROLE_ANALOG = 1, PW_ROLE_DIGITAL, PW_ROLE_ERROR, PW_ROLE_LIMIT, PW_ROLE_ENVELOPE,
    PW_ROLE_EDGE, PW_ROLE_ZERO, PW_ROLE_FRAME = 16, PW_ROLE_GRID, PW_ROLE_FAINT, PW_ROLE_TEXT
} pw_role;

/* The elements of one <svg> .. </svg> of gnuplot's, from *at on, appended to out; *at then stands
 * behind it. False where there is none. Coordinates keep one decimal of a unit. */
bool pw_svg_take(const char **at, pw_text *out);

#endif
