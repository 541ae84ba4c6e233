/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/svg.h"

#include <ctype.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

/* A stretch of the text: one tag, or an attribute's value. */
typedef struct stretch { const char *from, *to; } stretch;

static const char *find(stretch in, const char *what)
{
    size_t n = strlen(what);
    for (const char *c = in.from; c + n <= in.to; c++)
        if (!memcmp(c, what, n)) return c;
    return NULL;
}

/* The value of an attribute, in either kind of quotes, blanks about = allowed; {0} if none. */
static stretch attribute(stretch tag, const char *name)
{
    stretch rest = tag;
    size_t n = strlen(name);
    for (const char *c; (c = find(rest, name)) != NULL; rest.from = c + n) {
        const char *v = c + n;
        if (!isspace((unsigned char)c[-1])) continue;
        while (v < tag.to && *v == ' ') v++;
        if (v == tag.to || *v++ != '=') continue;
        while (v < tag.to && *v == ' ') v++;
        if (v == tag.to || (*v != '"' && *v != '\'')) continue;
        const char *end = memchr(v + 1, *v, (size_t)(tag.to - v - 1));
        if (end) return (stretch){v + 1, end};
    }
    return (stretch){NULL, NULL};
}

/* The role in "rgb(0, 0, N)"; 0 for any other colour. */
static int role_of(stretch color)
{
    char text[40];
    int r, g, b;
    size_t n = (size_t)(color.to - color.from);
    if (!color.from || n >= sizeof text) return 0;
    memcpy(text, color.from, n);
    text[n] = 0;
    if (sscanf(text, "rgb( %d , %d , %d )", &r, &g, &b) != 3 || r || g) return 0;
    return b;
}

static void add_number(double value, pw_text *out)
{
    char text[40];
    snprintf(text, sizeof text, "%.1f", value);
    char *point = strchr(text, '.');
    if (point && point[1] == '0') *point = 0;
    pw_text_add(out, strcmp(text, "-0") ? text : "0");
}

/* Path data or points: numbers rounded, blanks joined. */
static void add_coordinates(stretch data, pw_text *out)
{
    bool blank = false, any = false;
    for (const char *c = data.from; c < data.to;) {
        if (isspace((unsigned char)*c)) {
            blank = true;
            c++;
            continue;
        }
        if (blank && any) pw_text_add(out, " ");
        blank = false;
        any = true;
        if (isdigit((unsigned char)*c) || *c == '-' || *c == '.') {
            char *end;
            add_number(strtod(c, &end), out);
            c = end;
        } else pw_text_add_bytes(out, c++, 1);
    }
}

static void add_line(stretch tag, pw_text *out)
{
    int role = role_of(attribute(tag, "stroke"));
    stretch d = attribute(tag, "d");
    if (!role || !d.from) return;
    pw_text_print(out, "<path class=\"l r%d\" d=\"", role);
    add_coordinates(d, out);
    pw_text_add(out, "\"/>\n");
}

static void add_area(stretch tag, pw_text *out)
{
    int role = role_of(attribute(tag, "fill"));
    stretch points = attribute(tag, "points");
    if (!role || !points.from) return;
    pw_text_print(out, "<polygon class=\"a r%d\" points=\"", role);
    add_coordinates(points, out);
    pw_text_add(out, "\"/>\n");
}

static bool position(stretch tag, double *x, double *y, double *turn)
{
    stretch value = attribute(tag, "transform");
    *turn = 0;
    if (!value.from
        || sscanf(value.from, "translate(%lf,%lf) rotate(%lf", x, y, turn) < 2) return false;
    return true;
}

/* Marks of gnuplot's become a cross for poles and a ring for everything else. */
static void add_mark(stretch tag, pw_text *out)
{
    double x, y, turn;
    int role = role_of(attribute(tag, "color"));
    if (!role || !position(tag, &x, &y, &turn)) return;
    if (role == PW_ROLE_ZERO) pw_text_print(out, "<circle class=\"m r%d\" r=\"5\" cx=\"", role);
    else pw_text_print(out, "<path class=\"m r%d\" d=\"M-5-5 5 5M-5 5 5-5\" transform=\"translate(",
                       role);
    add_number(x, out);
    pw_text_add(out, role == PW_ROLE_ZERO ? "\" cy=\"" : " ");
    add_number(y, out);
    pw_text_add(out, role == PW_ROLE_ZERO ? "\"/>\n" : ")\"/>\n");
}

/* tag is the <g> about the text, which follows it. */
static void add_text(stretch tag, stretch body, pw_text *out)
{
    double x, y, turn;
    int role = role_of(attribute(tag, "fill"));
    stretch anchor = attribute(tag, "text-anchor");
    const char *from = find(body, "<text>"), *to = find(body, "</text>");
    if (!role || !from || !to || !position(tag, &x, &y, &turn)) return;
    from += strlen("<text>");
    while (from < to && *from == ' ') from++;
    pw_text_print(out, "<text class=\"r%d\"", role);
    if (anchor.from && strncmp(anchor.from, "start", 5))
        pw_text_print(out, " text-anchor=\"%.*s\"", (int)(anchor.to - anchor.from), anchor.from);
    pw_text_add(out, " transform=\"translate(");
    add_number(x, out);
    pw_text_add(out, " ");
    add_number(y, out);
    pw_text_add(out, turn ? ")rotate(-90)\">" : ")\">");
    pw_text_add_bytes(out, from, (size_t)(to - from));
    pw_text_add(out, "</text>\n");
}

static bool is_tag(const char *at, const char *name)
{
    size_t n = strlen(name);
    return !strncmp(at + 1, name, n) && isspace((unsigned char)at[n + 1]);
}

bool pw_svg_take(const char **at, pw_text *out)
{
    const char *from = strstr(*at, "</defs>");
    const char *to = from ? strstr(from, "</svg>") : NULL;
    if (!to) return false;
    for (const char *c = from; (c = memchr(c, '<', (size_t)(to - c))) != NULL; c++) {
        const char *end = memchr(c, '>', (size_t)(to - c));
        if (!end) break;
        stretch tag = {c, end}, rest = {end, to};
        if (is_tag(c, "path")) add_line(tag, out);
        else if (is_tag(c, "polygon")) add_area(tag, out);
        else if (is_tag(c, "use")) add_mark(tag, out);
        else if (is_tag(c, "g") && attribute(tag, "font-size").from) add_text(tag, rest, out);
    }
    *at = to + strlen("</svg>");
    return true;
}
