/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A settings file: one YAML map of scalars, lists of words and maps of these, flattened to a list
 * of "key" or "key.key" with its text and place. Small on purpose: a target is data. */
#ifndef PW_TARGET_SETTINGS_H
#define PW_TARGET_SETTINGS_H

#include "base/arena.h"
#include "base/messages.h"

typedef struct pw_setting {
    const char *key, *text;      /* list items come as rows of their own with the list's key */
    pw_where at;                 /* of the value */
    bool used;
} pw_setting;

typedef struct pw_settings { pw_setting *row; int rows; } pw_settings;

/* Reads the text; messages name what is not such a file. All memory is the arena's. */
PW_CHECKED pw_status pw_settings_read(const char *text, size_t size, pw_arena *arena, pw_settings *out,
                                      pw_messages *messages);

/* The value of a key, marked as used; null where it is not there. */
const pw_setting *pw_setting_find(pw_settings *settings, const char *key);

#endif
