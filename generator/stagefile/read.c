/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "stagefile/read.h"

#include <sha256.h>

#include "stagefile/override.h"
#include "stagefile/take.h"

void pw_stage_free(pw_stage *stage)
{
    pw_arena_free(&stage->arena);
    *stage = (pw_stage){0};
}

/* The tree of the file with every override in it; null, told, where there is no map to read. */
static pw_tree *read_tree(const pw_text *yaml, const char *const *sets, int n_sets, pw_arena *arena,
                          pw_messages *messages)
{
    pw_tree *root;
    pw_status status = pw_tree_parse(pw_text_string(yaml), yaml->size, (pw_where){0}, arena, &root,
                                     messages);
    if (root ? root->kind != PW_TREE_MAP : !status) {
        bool empty = !root || pw_tree_is_empty(root);
        pw_error(messages, root ? root->at : (pw_where){1, 1},
                 "the file is %s; expected the keys of a stage, such as stage: keel_strain",
                 empty ? "empty" : pw_tree_phrase(root));
        return NULL;
    }
    for (int i = 0; root && i < n_sets; i++)
        pw_override(sets[i], (pw_where){-(i + 1), 0}, arena, root, messages);
    return root;
}

pw_status pw_stage_read(const pw_text *yaml, const char *const *sets, int n_sets, pw_stage *out,
                        pw_messages *messages)
{
    *out = (pw_stage){.name = "", .about = "", .target = "host"};
    int before = messages->errors;
    pw_port_default(&out->input);
    pw_port_default(&out->output);
    out->file = messages->file;
    pw_messages_set_options(messages, sets, n_sets);
    SHA256Data((const uint8_t *)pw_text_string(yaml), yaml->size, out->sha256);
    pw_tree *root = read_tree(yaml, sets, n_sets, &out->arena, messages);
    if (root) {
        pw_reader reader = {.stage = out, .arena = &out->arena, .messages = messages};
        reader.taken = pw_arena_take(&out->arena,
                                     (size_t)(pw_key_count + 1) * sizeof *reader.taken);
        out->taken = reader.taken;
        pw_take_map(&reader, "", root, out);
        pw_stage_check(&reader);
    }
    return messages->errors > before ? PW_WRONG : PW_OK;
}
