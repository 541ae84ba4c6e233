/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The program: verbs/table.c lists its verbs, each is one page in verbs/. */
#include <gsl/gsl_errno.h>
#include <signal.h>

#include "verbs/verbs.h"

int main(int argc, char **argv)
{
    gsl_set_error_handler_off();   /* every GSL status is looked at where it is returned */
    signal(SIGPIPE, SIG_IGN);      /* a closed standard output is an error like another */
    return pw_run(argc, argv);
}
