/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A string that grows. Everything the program writes is composed in one of these first. */
#ifndef PW_BASE_TEXT_H
#define PW_BASE_TEXT_H

#include <stddef.h>
#include "base/status.h"

typedef struct pw_text { char *data; size_t size, room; } pw_text;   /* {0} is empty; data is
                                                                        0-terminated once used */
void pw_text_add(pw_text *text, const char *more);
void pw_text_add_bytes(pw_text *text, const void *bytes, size_t n);
void pw_text_print(pw_text *text, const char *format, ...) PW_PRINTF(2, 3);
const char *pw_text_string(const pw_text *text);          /* never null */
void pw_text_free(pw_text *text);

/* The shortest decimal that reads back as exactly this double (or float); "inf", "-inf", "nan"
 * as such. The buffer must hold PW_NUMBER_ROOM bytes and is returned. The locale never matters. */
#define PW_NUMBER_ROOM 40
char *pw_shortest(char *buffer, double value);
char *pw_shortest_float(char *buffer, float value);

/* A value with an SI prefix for people: pw_si(buffer, 48000, "Hz", 4) is "48 kHz". digits are
 * significant digits. The buffer must hold PW_NUMBER_ROOM bytes. */
char *pw_si(char *buffer, double value, const char *unit, int digits);

#endif
