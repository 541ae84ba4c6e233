/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The one status type. A fallible function returns it and its result may not be ignored.
 * The values are the exit statuses of the program. */
#ifndef PW_BASE_STATUS_H
#define PW_BASE_STATUS_H

typedef enum pw_status {
    PW_OK = 0,        /* done */
    PW_NOT_MET = 1,   /* done, and some limit is not met */
    PW_WRONG = 2,     /* the command line or the stage file is wrong; messages say where */
    PW_FAILED = 3     /* the work could not be done: file, memory, no convergence */
} pw_status;

#define PW_CHECKED __attribute__((warn_unused_result))
#define PW_PRINTF(text, first) __attribute__((format(printf, text, first)))

/* A phrase for a status, for messages; never null. */
const char *pw_status_phrase(pw_status status);

#endif
