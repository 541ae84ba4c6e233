/* SPDX-License-Identifier: GPL-3.0-or-later */
/* polewright schema: the JSON Schema of the stage file. */
#include <stdio.h>

#include "stagefile/schema.h"
#include "verbs/verbs.h"

static pw_status run(const pw_call *call)
{
    (void)call;
    pw_text schema = {0};
    pw_schema_write(&schema);
    fwrite(pw_text_string(&schema), 1, schema.size, stdout);   /* pw_run looks at the stream */
    pw_text_free(&schema);
    return PW_OK;
}

const pw_verb pw_verb_schema = {
    .name = "schema",
    .summary = "print the JSON Schema of the stage file, for editors",
    .run = run,
    .examples = "  polewright schema > stage.schema.json\n",
};
