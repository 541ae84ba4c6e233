/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdint.h>

#include "stagefile/tree.h"

/* The length of the well-formed sequence at p (RFC 3629: no overlong forms, no surrogates, nothing
 * above U+10FFFF) and its code point; 0 where there is none. */
static size_t sequence(const unsigned char *p, size_t left, uint32_t *point)
{
    static const uint32_t least[] = {0, 0, 0x80, 0x800, 0x10000};
    size_t n = p[0] < 0x80 ? 1 : p[0] >> 5 == 6 ? 2 : p[0] >> 4 == 14 ? 3 : p[0] >> 3 == 30 ? 4 : 0;
    if (!n || n > left) return 0;
    *point = n == 1 ? p[0] : p[0] & (0x7fu >> n);
    for (size_t i = 1; i < n; i++) {
        if (p[i] >> 6 != 2) return 0;
        *point = *point << 6 | (p[i] & 0x3f);
    }
    if (*point < least[n] || *point > 0x10ffff || (*point >= 0xd800 && *point <= 0xdfff)) return 0;
    return n;
}

static bool is_control(uint32_t point)
{
    if (point == '\t' || point == '\n' || point == '\r' || point == 0x85) return false;
    return point < 0x20 || (point >= 0x7f && point <= 0x9f) || point == 0xfffe || point == 0xffff
        || point == 0xfeff;
}

const char *pw_utf8_fault(const char *bytes, size_t size, pw_where *at)
{
    const unsigned char *p = (const unsigned char *)bytes, *end = p + size;
    *at = (pw_where){1, 1};
    if (size >= 2 && ((p[0] == 0xff && p[1] == 0xfe) || (p[0] == 0xfe && p[1] == 0xff)))
        return "the text is UTF-16";
    while (p < end) {
        uint32_t point = 0;
        size_t n = sequence(p, (size_t)(end - p), &point);
        if (!n) return "a byte that is not UTF-8";
        if (!point) return "a NUL character";
        if (is_control(point)) return "a control character";
        bool breaks = point == '\n' || point == 0x85 || point == 0x2028 || point == 0x2029
                   || (point == '\r' && (p + 1 == end || p[1] != '\n'));
        p += n;
        if (breaks) *at = (pw_where){at->line + 1, 1};
        else at->column++;
    }
    return NULL;
}
