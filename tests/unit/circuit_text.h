/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Circuits for unit tests, read from the YAML of a stage file. */
#ifndef PW_TESTS_CIRCUIT_TEXT_H
#define PW_TESTS_CIRCUIT_TEXT_H

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "analog/circuit.h"
#include "stagefile/read.h"

typedef struct fixture { pw_stage stage; pw_messages messages; } fixture;

#define PARTS(...) "parts: {" __VA_ARGS__ "}"
#define CIRCUIT(rest) "stage: test\nrate: 48 kHz\nanalog: {circuit: {input: {voltage: in}, output: out, " rest "}}\n"

/* yaml: a whole stage file. */
static inline const pw_circuit *fixture_read(fixture *f, const char *yaml)
{
    pw_text text = {0};
    memset(f, 0, sizeof *f);
    f->messages.file = "test";
    pw_text_add(&text, yaml);
    if (pw_stage_read(&text, NULL, 0, &f->stage, &f->messages)) {
        pw_messages_print(&f->messages, stderr, false);
        abort();
    }
    pw_text_free(&text);
    return &f->stage.analog.circuit;
}

static inline void fixture_free(fixture *f)
{
    pw_messages_free(&f->messages);
    pw_stage_free(&f->stage);
}

#endif
