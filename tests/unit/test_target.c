/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Reading targets: what stands in the files, and what a wrong name or a wrong file is told. */
#define _GNU_SOURCE
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>

#include "target/settings.h"
#include "target/target.h"

static void reads_a_target(void **state)
{
    (void)state;
    pw_target t;
    pw_messages messages = {.file = "x.yaml"};
    assert_int_equal(pw_target_read("cortex-m4f", (pw_where){3, 9}, &t, &messages), PW_OK);
    assert_string_equal(t.name, "cortex-m4f");
    assert_true(t.has_dsp && t.has_float && t.has_long_multiply && !t.has_vector && !t.has_double);
    assert_int_equal(t.word_bits, 32);
    assert_int_equal(t.instructions, PW_ARMV7E_M);
    assert_int_equal(t.flash_bytes, 4 * 1024 * 1024);
    pw_target_free(&t);
    pw_messages_free(&messages);
}

static void lists_every_target(void **state)
{
    (void)state;
    static const char *const expected[] = {"avr", "cortex-m0", "cortex-m3", "cortex-m33", "cortex-m4f",
                                           "cortex-m55", "cortex-m7", "host", "rv32imac", "rv32imafc"};
    pw_arena arena = {0};
    const char **names;
    int n;
    assert_int_equal(pw_target_names(&arena, &names, &n), PW_OK);
    assert_int_equal(n, 10);
    for (int i = 0; i < n; i++) {
        pw_target t;
        pw_messages messages = {.file = "x.yaml"};
        assert_string_equal(names[i], expected[i]);
        assert_int_equal(pw_target_read(names[i], (pw_where){0, 0}, &t, &messages), PW_OK);
        pw_target_free(&t);
    }
    pw_arena_free(&arena);
}

static void printed(pw_messages *messages, char *buffer, size_t room)
{
    FILE *f = fmemopen(buffer, room, "w");
    pw_messages_print(messages, f, false);
    fclose(f);
    pw_messages_free(messages);
}

static void names_the_nearest(void **state)
{
    (void)state;
    static const char *const wrong[] = {"cortex-m4", "../targets/host", ""};
    for (int i = 0; i < 3; i++) {
        char text[300] = "";
        pw_target t;
        pw_messages messages = {.file = "x.yaml"};
        assert_int_equal(pw_target_read(wrong[i], (pw_where){3, 9}, &t, &messages), PW_WRONG);
        printed(&messages, text, sizeof text);
        assert_non_null(strstr(text, "x.yaml:3:9: unknown target '"));
        if (i == 0) assert_non_null(strstr(text, "cortex-m4f"));
    }
}

static void flattens_settings(void **state)
{
    (void)state;
    static const char text[] = "about: a b\nhas: [x, y]\ncost: {call: 12, \"q15\": -3.5}\n";
    pw_arena arena = {0};
    pw_settings s;
    pw_messages messages = {.file = "s"};
    assert_int_equal(pw_settings_read(text, strlen(text), &arena, &s, &messages), PW_OK);
    assert_int_equal(s.rows, 5);
    assert_string_equal(pw_setting_find(&s, "cost.q15")->text, "-3.5");
    assert_string_equal(pw_setting_find(&s, "has")->text, "x");
    assert_int_equal(pw_setting_find(&s, "cost.call")->at.line, 3);
    assert_null(pw_setting_find(&s, "call"));
    pw_arena_free(&arena);
}

/* A folder of targets of our own with one faulty settings file. */
static pw_status read_faulty(const char *settings)
{
    char root[] = "/tmp/pw-target-XXXXXX", path[200];
    assert_non_null(mkdtemp(root));
    snprintf(path, sizeof path, "%s/targets", root);
    mkdir(path, 0777);
    snprintf(path, sizeof path, "%s/targets/odd", root);
    mkdir(path, 0777);
    snprintf(path, sizeof path, "%s/targets/odd/settings.yaml", root);
    FILE *f = fopen(path, "w");
    fputs(settings, f);
    fclose(f);
    setenv("POLEWRIGHT_DATA", root, 1);
    pw_target t;
    pw_messages messages = {.file = "x.yaml"};
    pw_status status = pw_target_read("odd", (pw_where){0, 0}, &t, &messages);
    if (!status) pw_target_free(&t);
    unsetenv("POLEWRIGHT_DATA");
    remove(path);
    pw_messages_free(&messages);
    return status;
}

static void refuses_faulty_files(void **state)
{
    (void)state;
    assert_int_equal(read_faulty("about: x\ncompiler: gcc\nword: 32\n"), PW_OK);
    assert_int_equal(read_faulty("about: x\ncompiler: gcc\nword: 33\n"), PW_FAILED);
    assert_int_equal(read_faulty("about: x\ncompiler: gcc\nword: 32\nhas: [flaot]\n"), PW_FAILED);
    assert_int_equal(read_faulty("about: x\nword: 32\n"), PW_FAILED);
    assert_int_equal(read_faulty("about: x\ncompiler: gcc\nword: 32\nflags: a\nflags: b\n"), PW_FAILED);
    assert_int_equal(read_faulty("about: x\ncompiler: gcc\nword: 32\nflash: 12 kB\n"), PW_FAILED);
    assert_int_equal(read_faulty("about: x\ncompiler: gcc\nword: 32\nmemory: 12\n"), PW_FAILED);
    assert_int_equal(read_faulty("about: x\ncompiler: gcc\nword: 32\ncost: {a: b}\n"), PW_FAILED);
    assert_int_equal(read_faulty("- a\n- b\n"), PW_FAILED);
    assert_int_equal(read_faulty("a: [b\n"), PW_FAILED);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(reads_a_target),   cmocka_unit_test(lists_every_target),
        cmocka_unit_test(names_the_nearest), cmocka_unit_test(flattens_settings),
        cmocka_unit_test(refuses_faulty_files),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
