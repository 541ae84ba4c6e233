/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "base/text.h"

#include <float.h>
#include <math.h>
#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/arena.h"

static void make_room(pw_text *text, size_t more)
{
    if (text->room - text->size > more && text->data) return;
    size_t room = text->room ? text->room : 256;
    while (room - text->size <= more) room *= 2;
    text->data = pw_retake(text->data, room);
    text->room = room;
}

void pw_text_add_bytes(pw_text *text, const void *bytes, size_t n)
{
    make_room(text, n);
    if (n) memcpy(text->data + text->size, bytes, n);
    text->size += n;
    text->data[text->size] = 0;
}

void pw_text_add(pw_text *text, const char *more)
{
    pw_text_add_bytes(text, more, strlen(more));
}

void pw_text_print(pw_text *text, const char *format, ...)
{
    va_list args, again;
    va_start(args, format);
    va_copy(again, args);
    int n = vsnprintf(NULL, 0, format, args);
    if (n > 0) {
        make_room(text, (size_t)n);
        vsnprintf(text->data + text->size, (size_t)n + 1, format, again);
        text->size += (size_t)n;
    }
    va_end(again);
    va_end(args);
}

const char *pw_text_string(const pw_text *text)
{
    return text->data ? text->data : "";
}

void pw_text_free(pw_text *text)
{
    free(text->data);
    *text = (pw_text){0};
}

char *pw_shortest(char *buffer, double value)
{
    if (isnan(value)) return strcpy(buffer, "nan");
    /* A normal double is the nearest to any decimal of 15 digits, so %.15g finds every shorter one. */
    for (int digits = fabs(value) < DBL_MIN ? 1 : 15; digits <= 17; digits++) {
        snprintf(buffer, PW_NUMBER_ROOM, "%.*g", digits, value);
        if (strtod(buffer, NULL) == value) break;
    }
    return buffer;
}

char *pw_shortest_float(char *buffer, float value)
{
    if (isnan(value)) return strcpy(buffer, "nan");
    for (int digits = fabsf(value) < FLT_MIN ? 1 : 6; digits <= 9; digits++) {
        snprintf(buffer, PW_NUMBER_ROOM, "%.*g", digits, (double)value);
        if (strtof(buffer, NULL) == value) break;
    }
    return buffer;
}

char *pw_si(char *buffer, double value, const char *unit, int digits)
{
    static const char *const prefix[] = {"f", "p", "n", "u", "m", "", "k", "M", "G", "T"};
    int step = 5;
    if (value != 0 && isfinite(value)) {
        char rounded[PW_NUMBER_ROOM];
        snprintf(rounded, sizeof rounded, "%.*e", digits - 1, value);
        step += (int)floor(log10(fabs(strtod(rounded, NULL))) / 3 + 1e-12);
        if (step < 0) step = 0;
        if (step > 9) step = 9;
    }
    snprintf(buffer, PW_NUMBER_ROOM, "%.*g %s%s", digits, value / pow(10, 3 * (step - 5)),
             prefix[step], unit);
    return buffer;
}
