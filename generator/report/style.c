/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/style.h"

#include <string.h>

#include "report/table.h"

const pw_style *pw_style_of(bool color)
{
    static const pw_style none = {"", "", "", "", ""};
    static const pw_style some = {"\033[1m", "\033[32m", "\033[1;31m", "\033[2m", "\033[0m"};
    return color ? &some : &none;
}

void pw_text_wrap(const char *body, int indent, int width, pw_text *out)
{
    int column = indent;
    while (*body) {
        char word[200];
        size_t n = strcspn(body, " ");
        if (n >= sizeof word) n = sizeof word - 1;
        memcpy(word, body, n);
        word[n] = 0;
        int w = pw_text_width(word);
        if (column > indent && column + 1 + w > width) {
            pw_text_print(out, "\n%*s", indent, "");
            column = indent;
        } else if (column > indent) {
            pw_text_add(out, " ");
            column++;
        }
        pw_text_add(out, word);
        column += w;
        body += n;
        body += strspn(body, " ");
    }
    pw_text_add(out, "\n");
}
