/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "base/roff.h"

void pw_roff_add(pw_text *out, const char *text)
{
    for (const char *p = text; *p; p++) {
        int starts = p == text || p[-1] == '\n';
        if (*p == '-') pw_text_add(out, "\\-");
        else if (*p == '\\') pw_text_add(out, "\\e");
        else if (starts && (*p == '.' || *p == '\'')) pw_text_print(out, "\\&%c", *p);
        else pw_text_add_bytes(out, p, 1);
    }
}
