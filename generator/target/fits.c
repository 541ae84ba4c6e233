/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "target/fits.h"

static void judge_memory(const pw_stage *stage, const pw_target *target, const char *memory, long needed, long has,
                         pw_messages *messages)
{
    if (needed <= 0 || has <= 0 || needed <= has) return;
    pw_error(messages, stage->target_at, "the C needs about %ld bytes of %s and %s has %ld; expected a larger part, "
             "fewer poles, or code: runtime", needed, memory, target->name, has);
}

pw_status pw_target_fits(const pw_stage *stage, const pw_target *target, const pw_cost *cost, pw_messages *messages)
{
    int before = messages->errors;
    bool fixed = stage->arithmetic.sample == PW_Q15 || stage->arithmetic.sample == PW_Q31;
    if (fixed && !target->has_multiply)
        pw_error(messages, stage->target_at, "%s has no multiply instruction, which every section of a fixed-point "
                 "filter needs; expected a part whose settings have multiply", target->name);
    judge_memory(stage, target, "flash", cost->flash_bytes, target->flash_bytes, messages);
    judge_memory(stage, target, "RAM", cost->ram_bytes + cost->stack_bytes, target->ram_bytes, messages);
    return messages->errors > before ? PW_WRONG : PW_OK;
}
