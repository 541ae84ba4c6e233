/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Writes the documents that are made from the tables of the program: manual pages, shell
 * completions, the schema. Usage: make-documents DIRECTORY */
#include <stdio.h>
#include <string.h>

#include "base/files.h"
#include "base/roff.h"
#include "stagefile/manual.h"
#include "stagefile/schema.h"
#include "verbs/verbs.h"

static void manual_options(pw_text *out, const pw_option *option)
{
    for (const pw_option *o = option; o && o->name; o++) {
        pw_text_print(out, ".It Fl \\-%s", o->name);
        if (o->argument) pw_text_print(out, " Ar %s", o->argument);
        pw_text_add(out, "\n");
        pw_roff_add(out, o->help);
        pw_text_add(out, ".\n");
    }
}

static void manual_verb(pw_text *out, const pw_verb *verb)
{
    pw_text_print(out, ".It Cm %s%s\n", verb->name,
                  verb->needs_stage ? " Ar stage.yaml" : verb->takes_stage ? " Op Ar stage.yaml" : "");
    pw_roff_add(out, verb->summary);
    pw_text_add(out, ".\n");
    if (!verb->option) return;
    pw_text_add(out, ".Bl -tag -width Ds\n");
    manual_options(out, verb->option);
    pw_text_add(out, ".El\n");
}

static void write_manual(pw_text *out)
{
    pw_text_add(out, ".\\\" SPDX-License-Identifier: GPL-3.0-or-later\n.Dd $Mdocdate$\n.Dt POLEWRIGHT 1\n.Os\n"
                     ".Sh NAME\n.Nm polewright\n.Nd turn an analog stage into proved C for a microcontroller\n"
                     ".Sh SYNOPSIS\n.Nm\n.Ar verb\n.Ar stage.yaml\n.Op Fl o Ar directory\n.Op Ar options\n"
                     ".Sh DESCRIPTION\n.Nm\nreads the description of an analog stage, finds its poles and zeros, "
                     "transforms them\nto a sample rate, and writes C in float or fixed point that does the stage's job,\n"
                     "with a bound on every node, the error of every step and test vectors.\nThe stage file is described in\n"
                     ".Xr polewright-stage 5 .\nA file name of\n.Sq \\-\nis standard input.\n.Ss Verbs\n.Bl -tag -width Ds\n");
    for (int i = 0; i < pw_verb_count; i++) manual_verb(out, pw_verbs[i]);
    pw_text_add(out, ".El\n.Ss Options for every verb\n.Bl -tag -width Ds\n.It Fl o Ar directory\n"
                     "Where files go; by default the stage's name with\n.Pa .out .\n");
    manual_options(out, pw_common_options);
    pw_text_add(out, ".El\n.Sh ENVIRONMENT\n.Bl -tag -width Ds\n.It Ev POLEWRIGHT_DATA\n"
                     "The directory that holds the runtime and the targets, where it is not found by itself.\n"
                     ".It Ev NO_COLOR\nNo colour by default.\n.El\n.Sh EXIT STATUS\n");
    pw_roff_add(out, pw_exit_statuses);
    pw_text_add(out, ".\n.Sh EXAMPLES\n.Bd -literal\n");
    for (int i = 0; i < pw_verb_count; i++)
        if (pw_verbs[i]->examples) pw_roff_add(out, pw_verbs[i]->examples);
    pw_text_add(out, ".Ed\n.Sh SEE ALSO\n.Xr polewright-stage 5\n.Sh CAVEATS\n"
                     "A digital replacement does not remove the need for the analog anti\\-alias filter and for hardware\n"
                     "protection.\nWhat is written here is not certified: defer to the governing standards and local codes and to a\n"
                     "licensed or qualified engineer's review.\n");
}

static void option_words(pw_text *out, const pw_option *option)
{
    for (const pw_option *o = option; o && o->name; o++)
        pw_text_print(out, "--%s%s ", o->name, o->argument ? "=" : "");
}

static void write_bash(pw_text *out)
{
    pw_text_add(out, "# SPDX-License-Identifier: GPL-3.0-or-later\n# bash completion for polewright\n_polewright()\n{\n"
                     "    local word=${COMP_WORDS[COMP_CWORD]} verb=${COMP_WORDS[1]} before=${COMP_WORDS[COMP_CWORD-1]}\n"
                     "    COMPREPLY=()\n    if [ \"$COMP_CWORD\" -eq 1 ]; then\n        COMPREPLY=($(compgen -W '");
    for (int i = 0; i < pw_verb_count; i++) pw_text_print(out, "%s ", pw_verbs[i]->name);
    pw_text_add(out, "--help --version' -- \"$word\"))\n        return\n    fi\n"
                     "    if [ \"$before\" = -o ]; then\n        COMPREPLY=($(compgen -d -- \"$word\"))\n        return\n    fi\n"
                     "    if [ \"$before\" = --target ]; then\n"
                     "        COMPREPLY=($(compgen -W \"$(polewright targets 2>/dev/null | sed -n 's/^\\([^ ][^ ]*\\).*/\\1/p')\" -- \"$word\"))\n        return\n    fi\n"
                     "    if [ \"$before\" = --color ]; then\n        COMPREPLY=($(compgen -W 'auto always never' -- \"$word\"))\n"
                     "        return\n    fi\n    case $word in\n    -*)\n        local own=\n        case $verb in\n");
    for (int i = 0; i < pw_verb_count; i++) {
        if (!pw_verbs[i]->option) continue;
        pw_text_print(out, "        %s) own='", pw_verbs[i]->name);
        option_words(out, pw_verbs[i]->option);
        pw_text_add(out, "' ;;\n");
    }
    pw_text_add(out, "        esac\n        COMPREPLY=($(compgen -W \"-o $own");
    option_words(out, pw_common_options);
    pw_text_add(out, "\" -- \"$word\"))\n        [[ ${COMPREPLY[0]} == *= ]] && compopt -o nospace\n        ;;\n"
                     "    *)\n        COMPREPLY=($(compgen -f -X '!*.y?(a)ml' -- \"$word\") $(compgen -d -- \"$word\"))\n"
                     "        ;;\n    esac\n}\nshopt -s extglob\ncomplete -o filenames -F _polewright polewright\n");
}

static void zsh_options(pw_text *out, const pw_option *option)
{
    for (const pw_option *o = option; o && o->name; o++) {
        pw_text_print(out, " '--%s%s[", o->name, o->argument ? "=" : "");
        for (const char *p = o->help; *p; p++)
            pw_text_print(out, *p == '\'' ? "'\\''" : strchr("[]:", *p) ? "\\%c" : "%c", *p);
        pw_text_print(out, "]%s%s'", o->argument ? ":" : "", o->argument ? o->argument : "");
    }
}

static void write_zsh(pw_text *out)
{
    pw_text_add(out, "#compdef polewright\n# SPDX-License-Identifier: GPL-3.0-or-later\nlocal -a verbs\nverbs=(");
    for (int i = 0; i < pw_verb_count; i++) pw_text_print(out, "\n  '%s:%s'", pw_verbs[i]->name, pw_verbs[i]->summary);
    pw_text_add(out, "\n)\nif (( CURRENT == 2 )); then\n  _describe verb verbs\n  return\nfi\nlocal -a own\ncase $words[2] in\n");
    for (int i = 0; i < pw_verb_count; i++) {
        if (!pw_verbs[i]->option) continue;
        pw_text_print(out, "  %s) own=(", pw_verbs[i]->name);
        zsh_options(out, pw_verbs[i]->option);
        pw_text_add(out, ") ;;\n");
    }
    pw_text_add(out, "esac\nshift words\n(( CURRENT-- ))\n_arguments '-o[where files go]:directory:_files -/' $own");
    zsh_options(out, pw_common_options);
    pw_text_add(out, " '*:stage file:_files -g \"*.y(a|)ml\"'\n");
}

int main(int argc, char **argv)
{
    if (argc != 2) {
        fputs("usage: make-documents DIRECTORY\n", stderr);
        return PW_WRONG;
    }
    pw_fileset set = {0};
    write_manual(pw_fileset_add(&set, "polewright.1"));
    pw_manual_write(pw_fileset_add(&set, "polewright-stage.5"));
    write_bash(pw_fileset_add(&set, "polewright.bash"));
    write_zsh(pw_fileset_add(&set, "_polewright"));
    pw_schema_write(pw_fileset_add(&set, "polewright-stage.schema.json"));
    pw_status status = pw_fileset_write(&set, argv[1]);
    pw_fileset_free(&set);
    return status;
}
