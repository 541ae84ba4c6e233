/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What a stage costs on a part, before it is built: from the figures in the target's settings file
 * (its `cost` map), which were fitted to what the emulator counts and to what `size` prints. */
#ifndef PW_TARGET_COST_H
#define PW_TARGET_COST_H

#include "report/results.h"
#include "target/settings.h"

typedef struct pw_cost_figure { const char *name; double value; } pw_cost_figure;
typedef struct pw_cost_model { pw_cost_figure *figure; int figures; } pw_cost_model;

/* The `cost` map of a settings file; null in *out where there is none. */
void pw_cost_model_read(pw_settings *settings, pw_arena *arena, pw_cost_model **out, pw_messages *messages);

/* Sections, multiplies a sample, cycles a sample in a block of 64 (instructions where the emulator
 * counts those; NAN where the target has no model), bytes of flash (code and constants), of RAM
 * (state of one channel) and of stack. */
void pw_cost_estimate(const pw_stage *stage, const pw_realisation *realisation, const pw_target *target,
                      pw_cost *out);

#endif
