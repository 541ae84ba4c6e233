/* SPDX-License-Identifier: GPL-3.0-or-later */
/* polewright targets: the parts that C can be made for, and what each can do. */
#include <jansson.h>
#include <stdio.h>
#include <stdlib.h>

#include "target/cost.h"
#include "target/target.h"
#include "verbs/verbs.h"

typedef struct ability { const char *word; bool has; } ability;

#define ABILITIES 7

static void abilities_of(const pw_target *t, ability *list)
{
    list[0] = (ability){"float", t->has_float};
    list[1] = (ability){"double", t->has_double};
    list[2] = (ability){"multiply", t->has_multiply};
    list[3] = (ability){"long-multiply", t->has_long_multiply};
    list[4] = (ability){"dsp", t->has_dsp};
    list[5] = (ability){"saturate", t->has_saturate};
    list[6] = (ability){"vector", t->has_vector};
}

static json_t *as_json(const pw_target *t)
{
    ability list[ABILITIES];
    abilities_of(t, list);
    json_t *has = json_array();
    for (int i = 0; i < ABILITIES; i++)
        if (list[i].has) json_array_append_new(has, json_string(list[i].word));
    return json_pack("{s:s, s:s, s:s, s:i, s:o, s:I, s:I, s:s, s:s, s:b}", "name", t->name, "about", t->about,
                     "instructions", pw_instructions_word(t->instructions), "word_bits", t->word_bits, "has", has,
                     "flash_bytes", (json_int_t)t->flash_bytes, "ram_bytes", (json_int_t)t->ram_bytes,
                     "compiler", t->compiler, "flags", t->flags, "cost_model", t->cost != NULL);
}

static void print_size(const char *what, long bytes)
{
    if (!bytes) return;
    if (bytes % (1024 * 1024) == 0) printf(", %ld MiB %s", bytes / 1024 / 1024, what);
    else printf(", %ld KiB %s", bytes / 1024, what);
}

static void print_target(const pw_target *t)
{
    ability list[ABILITIES];
    abilities_of(t, list);
    printf("%-12s %s\n%13s%d bits", t->name, t->about, "", t->word_bits);
    print_size("flash", t->flash_bytes);
    print_size("RAM", t->ram_bytes);
    printf("; in hardware:");
    for (int i = 0; i < ABILITIES; i++)
        if (list[i].has) printf(" %s", list[i].word);
    printf("\n%13s%s%s%s%s\n", "", t->compiler, *t->flags ? " " : "", t->flags, t->cost ? "" : "\n             no cost model");
}

static pw_status run(const pw_call *call)
{
    pw_arena arena = {0};
    const char **names;
    int n;
    pw_status status = pw_target_names(&arena, &names, &n);
    json_t *all = json_array();
    for (int i = 0; !status && i < n; i++) {
        pw_target target;
        pw_messages messages = {.file = "polewright"};
        status = pw_target_read(names[i], (pw_where){0, 0}, &target, &messages);
        pw_messages_print(&messages, stderr, false);
        pw_messages_free(&messages);
        if (status) break;
        if (call->json) json_array_append_new(all, as_json(&target));
        else print_target(&target);
        pw_target_free(&target);
    }
    if (!status && call->json && (json_dumpf(all, stdout, JSON_INDENT(2)) || putchar('\n') == EOF))
        status = PW_FAILED;
    json_decref(all);
    pw_arena_free(&arena);
    return status;
}

const pw_verb pw_verb_targets = {
    .name = "targets",
    .summary = "list the targets and what each can do",
    .run = run,
    .examples = "  polewright targets\n  polewright targets --json\n",
};
