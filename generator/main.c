/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The table of verbs. Each verb is one page in verbs/. */
#include <gsl/gsl_errno.h>
#include <signal.h>
#include <stddef.h>

#include "verbs/verbs.h"

static const pw_verb *const verbs[] = {
    &pw_verb_targets,
    NULL,
};

int main(int argc, char **argv)
{
    gsl_set_error_handler_off();   /* every GSL status is looked at where it is returned */
    signal(SIGPIPE, SIG_IGN);      /* a closed standard output is an error like another */
    return pw_run(verbs, (int)(sizeof verbs / sizeof verbs[0]) - 1, argc, argv);
}
