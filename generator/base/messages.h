/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Messages about what the user wrote, collected over a whole run and printed sorted by place. */
#ifndef PW_BASE_MESSAGES_H
#define PW_BASE_MESSAGES_H

#include <stdbool.h>
#include <stdio.h>
#include "base/status.h"

/* A place in the stage file. Lines and columns count from 1, columns in characters; {0, 0} is no
 * place (a message then starts with the file's name alone). Line -k is the k-th --set option: a
 * message then starts with "--set" and its text in place of the file. */
typedef struct pw_where { int line, column; } pw_where;

typedef struct pw_messages {
    const char *file;                    /* as messages name it: the path, or "stdin" */
    struct pw_message *list;
    int count, errors;
    char **sets;                         /* the --set options; null where there are none */
    int n_sets;
} pw_messages;                           /* {.file = name} is empty */

/* Keeps the texts of the --set options, as copies, in place of earlier ones. */
void pw_messages_set_options(pw_messages *messages, const char *const *sets, int n_sets);

/* The text reads "what is wrong; what was expected", without a full stop or a newline. The same
 * text at the same place is kept once. */
void pw_error(pw_messages *messages, pw_where at, const char *format, ...) PW_PRINTF(3, 4);
void pw_warning(pw_messages *messages, pw_where at, const char *format, ...) PW_PRINTF(3, 4);

/* Prints FILE:LINE:COLUMN: [warning: ]text, one line each, in order of place; after 50 messages
 * the rest are counted. Printed ones are forgotten; the count of errors stays. */
void pw_messages_print(pw_messages *messages, FILE *to, bool errors_only);
void pw_messages_free(pw_messages *messages);

#endif
