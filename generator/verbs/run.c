/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "verbs/verbs.h"

#include <errno.h>
#include <getopt.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include "base/arena.h"
#include "base/nearest.h"

/* The order of pw_common_options, from which getopt's codes follow. */
enum { OPTION_SET = 256, OPTION_TARGET, OPTION_JSON, OPTION_QUIET, OPTION_VERBOSE, OPTION_COLOR,
       OPTION_HELP, OPTION_VERSION, OPTION_EXTRA };

const pw_option pw_common_options[] = {
    {"set", "PATH=VALUE", "override one value of the stage file; repeatable"},
    {"target", "NAME", "the part that the C is for (see: polewright targets)"},
    {"json", NULL, "the report as JSON on standard output, nothing else there"},
    {"quiet", NULL, "print errors only"},
    {"verbose", NULL, "print the full report"},
    {"color", "WHEN", "auto, always or never"},
    {"help", NULL, "print how the verb is used"},
    {"version", NULL, "print the version"},
    {NULL, NULL, NULL},
};
#define COMMON (OPTION_EXTRA - OPTION_SET)

const char pw_exit_statuses[] =
    "0 done and every limit met; 1 done, and some limit is not met; 2 the command line or\n"
    "the stage file is wrong; 3 the work could not be done";

static void print_options(const pw_option *option)
{
    for (const pw_option *o = option; o && o->name; o++) {
        char left[64];
        snprintf(left, sizeof left, "--%s %s", o->name, o->argument ? o->argument : "");
        printf("  %-22s %s\n", left, o->help);
    }
}

static void print_common_options(void)
{
    puts("Options for every verb:\n"
         "  -o DIR                 where files go (default ./<stage>.out)");
    print_options(pw_common_options);
    printf("\nExit status: %s.\n", pw_exit_statuses);
}

static void print_help(void)
{
    puts("Usage: polewright VERB STAGE.yaml [options]\n\n"
         "Turns a described analog stage into C for a microcontroller and proves what the C does.\n\nVerbs:");
    for (int i = 0; i < pw_verb_count; i++)
        printf("  %-10s %s\n", pw_verbs[i]->name, pw_verbs[i]->summary);
    puts("\nSTAGE.yaml may be -, for standard input. 'polewright VERB --help' shows a verb's own options.\n");
    print_common_options();
    puts("\nExamples:\n  polewright show stage.yaml\n  polewright build stage.yaml -o out\n"
         "  polewright check stage.yaml --set rate=96k --set arithmetic.sample=q15");
}

static void print_verb_help(const pw_verb *verb)
{
    printf("Usage: polewright %s%s [options]\n\n%s\n", verb->name,
           verb->needs_stage ? " STAGE.yaml" : verb->takes_stage ? " [STAGE.yaml]" : "", verb->summary);
    if (verb->option) puts("\nOptions of this verb:");
    print_options(verb->option);
    puts("");
    print_common_options();
    if (verb->examples) printf("\nExamples:\n%s", verb->examples);
}

static pw_status wrong(const char *what, const char *word, const char *nearest)
{
    fprintf(stderr, "polewright: %s '%s'", what, word);
    if (nearest) fprintf(stderr, "; did you mean '%s'?", nearest);
    fputs(" (see: polewright --help)\n", stderr);
    return PW_WRONG;
}

static struct option as_getopt(const pw_option *o, int code)
{
    return (struct option){o->name, o->argument ? required_argument : no_argument, NULL, code};
}

static int collect_options(const pw_verb *verb, struct option *all)
{
    int n = 0;
    for (const pw_option *o = pw_common_options; o->name; o++, n++)
        all[n] = as_getopt(o, OPTION_SET + n);
    for (const pw_option *o = verb->option; o && o->name; o++, n++)
        all[n] = as_getopt(o, OPTION_SET + n);
    all[n] = (struct option){0};
    return n;
}

static pw_status unknown_option(const char *word, const struct option *all, int n)
{
    const char *names[COMMON + PW_MAX_EXTRA];
    char shown[128];
    for (int i = 0; i < n; i++) names[i] = all[i].name;
    const char *near = strncmp(word, "--", 2) ? NULL : pw_nearest(word + 2, names, n);
    if (near) snprintf(shown, sizeof shown, "--%s", near);
    return wrong("unknown option", word, near ? shown : NULL);
}

/* getopt_long leaves in optopt the letter of an unknown short option, or the code of a flag that
 * was given a value. */
static pw_status refused_option(const char *word, const struct option *all, int n)
{
    char letter[3] = {'-', (char)optopt, 0};
    if (optopt >= OPTION_SET) return wrong("a value was given to the flag", word, NULL);
    return unknown_option(optopt ? letter : word, all, n);
}

static pw_status take_color(pw_call *call, const char *word)
{
    static const char *const known[] = {"auto", "always", "never"};
    if (!strcmp(word, "always")) call->color = true;
    else if (!strcmp(word, "never")) call->color = false;
    else if (strcmp(word, "auto")) return wrong("--color knows auto, always and never, not", word, pw_nearest(word, known, 3));
    return PW_OK;
}

/* 1: help or version was printed and there is nothing more to do. */
static pw_status take_options(pw_call *call, int argc, char **argv, int *finished)
{
    struct option all[COMMON + PW_MAX_EXTRA + 1];
    int n = collect_options(call->verb, all);
    opterr = 0;
    optind = 1;
    for (;;) {
        int c = getopt_long(argc, argv, ":o:", all, NULL);
        if (c == -1) break;
        if (c == ':') return wrong("a value is missing after", argv[optind - 1], NULL);
        if (c == '?') return refused_option(argv[optind - 1], all, n);
        if (c >= OPTION_EXTRA) call->extra[c - OPTION_EXTRA] = optarg ? optarg : "";
        else if (c == 'o') call->directory = optarg;
        else if (c == OPTION_SET) {
            call->set = pw_retake(call->set, (size_t)(call->sets + 1) * sizeof *call->set);
            call->set[call->sets++] = optarg;
        }
        else if (c == OPTION_TARGET) call->target = optarg;
        else if (c == OPTION_JSON) call->json = true;
        else if (c == OPTION_QUIET) call->quiet = true;
        else if (c == OPTION_VERBOSE) call->verbose = true;
        else if (c == OPTION_COLOR) {
            pw_status status = take_color(call, optarg);
            if (status) return status;
        } else if (c == OPTION_HELP) {
            print_verb_help(call->verb);
            *finished = 1;
            return PW_OK;
        } else if (c == OPTION_VERSION) {
            puts("polewright " PW_VERSION);
            *finished = 1;
            return PW_OK;
        }
    }
    if (optind < argc) call->stage = argv[optind++];
    if (optind < argc) return wrong("only one stage file at a time; what to do with", argv[optind], NULL);
    if (call->directory && !*call->directory) return wrong("-o needs a directory, not", "", NULL);
    if (!call->stage && call->verb->needs_stage) {
        fprintf(stderr, "polewright: %s needs a stage file: polewright %s STAGE.yaml (or - for standard input)\n",
                call->verb->name, call->verb->name);
        return PW_WRONG;
    }
    return PW_OK;
}

static const pw_verb *find_verb(const char *word)
{
    const char *names[32];
    for (int i = 0; i < pw_verb_count; i++) {
        if (!strcmp(pw_verbs[i]->name, word)) return pw_verbs[i];
        names[i] = pw_verbs[i]->name;
    }
    (void)wrong("unknown verb", word, pw_nearest(word, names, pw_verb_count));
    return NULL;
}

/* Output that did not arrive is a failure, however well the work went; a reader that has seen enough and
 * went away (head) needs no message. */
static pw_status finish(pw_status status)
{
    if (fflush(stdout) || ferror(stdout)) {
        if (errno != EPIPE)
            fprintf(stderr, "polewright: cannot write to standard output: %s\n", strerror(errno));
        return PW_FAILED;
    }
    return status;
}

int pw_run(int argc, char **argv)
{
    if (argc < 2 || !strcmp(argv[1], "--help") || !strcmp(argv[1], "help")) {
        if (argc < 2) {
            fputs("polewright: a verb is missing; try: polewright --help\n", stderr);
            return PW_WRONG;
        }
        print_help();
        return finish(PW_OK);
    }
    if (!strcmp(argv[1], "--version")) {
        puts("polewright " PW_VERSION);
        return finish(PW_OK);
    }
    pw_call call = {.verb = find_verb(argv[1])};
    if (!call.verb) return PW_WRONG;
    call.color = isatty(STDOUT_FILENO) && !getenv("NO_COLOR");
    int finished = 0;
    pw_status status = take_options(&call, argc - 1, argv + 1, &finished);
    if (!status && !finished) status = call.verb->run(&call);
    free(call.set);
    return finish(status);
}
