/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What every verb gets, and the table row that describes one. */
#ifndef PW_VERBS_VERBS_H
#define PW_VERBS_VERBS_H

#include <stdbool.h>
#include "base/messages.h"
#include "base/status.h"

#define PW_MAX_EXTRA 24

typedef struct pw_option {
    const char *name;            /* "plot": --plot */
    const char *argument;        /* what the help calls its value; null: a flag */
    const char *help;
} pw_option;

typedef struct pw_call {
    const struct pw_verb *verb;
    const char *stage;           /* the path of the stage file, "-" standard input; null for verbs without */
    const char *directory;       /* -o; null where not given */
    const char **set;            /* --set, in order */
    int sets;
    const char *target;          /* --target; null where not given */
    bool json, quiet, verbose;
    bool color;                  /* resolved: text on standard output may be coloured */
    const char *extra[PW_MAX_EXTRA];   /* values of the verb's own options, in table order; "" for a
                                          flag that was given; null where not given */
} pw_call;

typedef struct pw_verb {
    const char *name, *summary;
    pw_status (*run)(const pw_call *call);
    bool needs_stage, takes_stage;     /* STAGE.yaml must be there; it may be there */
    const pw_option *option;     /* own options, ended by a null name; null: none */
    const char *examples;        /* for --help, whole lines */
} pw_verb;

/* The options that every verb takes, ended by a null name, and what the exit statuses mean. */
extern const pw_option pw_common_options[];
extern const char pw_exit_statuses[];

/* The verbs in the order of the help, and how many. */
extern const pw_verb *const pw_verbs[];
extern const int pw_verb_count;

/* Reads the command line, runs the verb, checks that standard output took everything. */
int pw_run(int argc, char **argv);

extern const pw_verb pw_verb_build, pw_verb_show, pw_verb_check, pw_verb_vectors, pw_verb_twin, pw_verb_targets, pw_verb_schema;

#endif
