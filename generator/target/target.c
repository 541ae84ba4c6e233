/* SPDX-License-Identifier: GPL-3.0-or-later */
#define _GNU_SOURCE
#include "target/target.h"

#include <ctype.h>
#include <dirent.h>
#include <limits.h>
#include <stddef.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include "base/files.h"
#include "base/nearest.h"
#include "target/cost.h"
#include "target/settings.h"

#define MAX_SETTINGS_BYTES (1u << 16)

static const char *const instruction_words[] = {
    "any", "armv6-m", "armv7-m", "armv7e-m", "armv8.1-m", "rv32", "avr"
};
#define INSTRUCTION_WORDS ((int)(sizeof instruction_words / sizeof instruction_words[0]))

const char *pw_instructions_word(pw_instructions instructions)
{
    return instruction_words[instructions];
}

/* Keys that only the test harness reads: how to build and run a program for the part. */
static const char *const harness_keys[] = {
    "package", "build", "libraries", "sources", "emulator-package", "tick"
};

static const struct { const char *word; size_t offset; } abilities[] = {
    {"float", offsetof(pw_target, has_float)},
    {"double", offsetof(pw_target, has_double)},
    {"multiply", offsetof(pw_target, has_multiply)},
    {"long-multiply", offsetof(pw_target, has_long_multiply)},
    {"dsp", offsetof(pw_target, has_dsp)},
    {"saturate", offsetof(pw_target, has_saturate)},
    {"vector", offsetof(pw_target, has_vector)},
};
#define ABILITIES (sizeof abilities / sizeof abilities[0])

/* "name" must stay inside targets/: one path component that does not start with a dot. */
static bool is_plain_name(const char *name)
{
    return *name && *name != '.' && !strchr(name, '/');
}

static int by_name(const void *a, const void *b)
{
    return strcmp(*(const char *const *)a, *(const char *const *)b);
}

pw_status pw_target_names(pw_arena *arena, const char ***names, int *n)
{
    char root[PATH_MAX], file[PATH_MAX + NAME_MAX + 32];
    pw_status status = pw_data_path("targets", root, sizeof root);
    if (status) return status;
    DIR *dir = opendir(root);
    if (!dir) {
        fprintf(stderr, "polewright: cannot read %s\n", root);
        return PW_FAILED;
    }
    const char **list = NULL;
    *n = 0;
    for (struct dirent *entry; (entry = readdir(dir));) {
        snprintf(file, sizeof file, "%s/%s/settings.yaml", root, entry->d_name);
        if (!is_plain_name(entry->d_name) || access(file, R_OK)) continue;
        list = pw_retake(list, (size_t)(*n + 1) * sizeof *list);
        list[(*n)++] = pw_arena_copy(arena, entry->d_name);
    }
    closedir(dir);
    *names = pw_arena_take(arena, (size_t)(*n + 1) * sizeof **names);
    if (*n) {
        memcpy(*names, list, (size_t)*n * sizeof *list);
        qsort(*names, (size_t)*n, sizeof **names, by_name);
    }
    free(list);
    return PW_OK;
}

static const char *text_of(pw_settings *settings, const char *key, const char *otherwise,
                           pw_messages *messages)
{
    const pw_setting *s = pw_setting_find(settings, key);
    if (!s && !otherwise) pw_error(messages, (pw_where){0, 0}, "'%s' is missing; expected '%s: ..'", key, key);
    return s ? s->text : otherwise ? otherwise : "";
}

/* Bytes, or a number with KiB or MiB. */
static long bytes_of(pw_settings *settings, const char *key, pw_messages *messages)
{
    const pw_setting *s = pw_setting_find(settings, key);
    if (!s) return 0;
    char *end;
    long value = strtol(s->text, &end, 10);
    while (isspace((unsigned char)*end)) end++;
    long unit = !*end ? 1 : !strcmp(end, "KiB") ? 1024 : !strcmp(end, "MiB") ? 1024 * 1024 : 0;
    if (!unit || end == s->text || value < 0 || value > LONG_MAX / 1024 / 1024)
        pw_error(messages, s->at, "'%s' is no size; expected bytes, or a number with KiB or MiB", s->text);
    return value * unit;
}

static void take_abilities(pw_settings *settings, pw_target *out, pw_messages *messages)
{
    const char *known[ABILITIES];
    for (size_t k = 0; k < ABILITIES; k++) known[k] = abilities[k].word;
    for (int i = 0; i < settings->rows; i++) {
        pw_setting *s = &settings->row[i];
        if (strcmp(s->key, "has")) continue;
        s->used = true;
        size_t k = 0;
        while (k < ABILITIES && strcmp(s->text, known[k])) k++;
        if (k < ABILITIES) *(bool *)((char *)out + abilities[k].offset) = true;
        else {
            const char *near = pw_nearest(s->text, known, (int)ABILITIES);
            pw_error(messages, s->at, "'%s' is no known ability; expected %s%s", s->text,
                     near ? "perhaps " : "float, double, multiply, long-multiply, dsp, saturate or vector",
                     near ? near : "");
        }
    }
}

static void take_core(pw_settings *settings, pw_target *out, pw_messages *messages)
{
    const pw_setting *s = pw_setting_find(settings, "instructions");
    const char *word = s ? s->text : "any";
    int k = 0;
    while (k < INSTRUCTION_WORDS && strcmp(word, instruction_words[k])) k++;
    if (k < INSTRUCTION_WORDS) out->instructions = (pw_instructions)k;
    else pw_error(messages, s->at, "'%s' is no instruction set that has kernels; expected any, armv6-m, "
                  "armv7-m, armv7e-m, armv8.1-m, rv32 or avr", word);
    s = pw_setting_find(settings, "word");
    out->word_bits = s ? atoi(s->text) : 0;
    if (out->word_bits != 8 && out->word_bits != 16 && out->word_bits != 32 && out->word_bits != 64)
        pw_error(messages, s ? s->at : (pw_where){0, 0}, "'word' is the register in bits; expected 8, 16, 32 or 64");
}

/* What the emulator counts, and so what the cost model is in. */
static void take_counts(pw_settings *settings, pw_target *out, pw_messages *messages)
{
    const pw_setting *s = pw_setting_find(settings, "counts");
    if (!s) return;
    out->counts_cycles = !strcmp(s->text, "cycles");
    if (!out->counts_cycles && strcmp(s->text, "instructions") != 0)
        pw_error(messages, s->at, "'%s' is nothing that an emulator counts; expected cycles or instructions", s->text);
}

static void complain_of_unused(const pw_settings *settings, pw_messages *messages)
{
    static const char *const known[] = {"about", "instructions", "word", "has", "flash", "ram", "compiler",
                                        "flags", "emulator", "cost", "package", "build", "libraries",
                                        "sources", "emulator-package", "tick", "counts"};
    for (int i = 0; i < settings->rows; i++) {
        const pw_setting *s = &settings->row[i];
        if (s->used) continue;
        const char *near = pw_nearest(s->key, known, (int)(sizeof known / sizeof known[0]));
        pw_error(messages, s->at, "unknown key '%s'%s%s", s->key, near ? "; did you mean " : "; expected one of "
                 "those in targets/host/settings.yaml", near ? near : "");
    }
}

static void take_settings(pw_settings *settings, pw_target *out, pw_messages *messages)
{
    out->about = text_of(settings, "about", NULL, messages);
    out->compiler = text_of(settings, "compiler", NULL, messages);
    out->flags = text_of(settings, "flags", "", messages);
    out->emulator = text_of(settings, "emulator", "", messages);
    out->flash_bytes = bytes_of(settings, "flash", messages);
    out->ram_bytes = bytes_of(settings, "ram", messages);
    take_core(settings, out, messages);
    take_abilities(settings, out, messages);
    take_counts(settings, out, messages);
    pw_cost_model_read(settings, &out->arena, &out->cost, messages);
    for (size_t i = 0; i < sizeof harness_keys / sizeof harness_keys[0]; i++)
        (void)pw_setting_find(settings, harness_keys[i]);
    complain_of_unused(settings, messages);
}

/* "cortex-m4" means cortex-m4f, though cortex-m0 is as near by letters: a beginning counts first. */
static const char *nearest_name(const char *name, const char *const *names, int n)
{
    for (int i = 0; *name && i < n; i++)
        if (!strncmp(names[i], name, strlen(name))) return names[i];
    return pw_nearest(name, names, n);
}

static pw_status unknown_target(const char *name, pw_where at, pw_messages *messages)
{
    pw_arena arena = {0};
    const char **names;
    int n;
    pw_status status = pw_target_names(&arena, &names, &n);
    if (!status) {
        const char *near = nearest_name(name, names, n);
        if (near) pw_error(messages, at, "unknown target '%s'; did you mean %s?", name, near);
        else pw_error(messages, at, "unknown target '%s'; expected one that 'polewright targets' lists", name);
        status = PW_WRONG;
    }
    pw_arena_free(&arena);
    return status;
}

static bool is_known(const char *name)
{
    pw_arena arena = {0};
    const char **names;
    int n;
    bool found = false;
    if (is_plain_name(name) && !pw_target_names(&arena, &names, &n))
        for (int i = 0; i < n; i++) found = found || !strcmp(name, names[i]);
    pw_arena_free(&arena);
    return found;
}

pw_status pw_target_check(const char *name, pw_where at, pw_messages *messages)
{
    return is_known(name) ? PW_OK : unknown_target(name, at, messages);
}

pw_status pw_target_read(const char *name, pw_where at, pw_target *out, pw_messages *messages)
{
    char path[PATH_MAX], inside[NAME_MAX + 64];
    *out = (pw_target){0};
    pw_status status = pw_target_check(name, at, messages);
    if (status) return status;
    snprintf(inside, sizeof inside, "targets/%.255s/settings.yaml", name);
    status = pw_data_path(inside, path, sizeof path);
    if (status) return status;
    pw_text text = {0};
    status = pw_file_read(path, MAX_SETTINGS_BYTES, &text);
    if (status) return PW_FAILED;
    pw_messages own = {.file = path};
    pw_settings settings;
    out->name = pw_arena_copy(&out->arena, name);
    if (!pw_settings_read(pw_text_string(&text), text.size, &out->arena, &settings, &own))
        take_settings(&settings, out, &own);
    status = own.errors ? PW_FAILED : PW_OK;
    pw_messages_print(&own, stderr, false);
    pw_messages_free(&own);
    pw_text_free(&text);
    if (status) pw_target_free(out);
    return status;
}

void pw_target_free(pw_target *target)
{
    pw_arena_free(&target->arena);
    *target = (pw_target){0};
}
