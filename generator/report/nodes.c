/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/nodes.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#include "report/figures.h"
#include "report/phrases.h"

char *pw_node_fate(const pw_results *results, const pw_node *node, char *buffer)
{
    char samples[PW_FIGURE_ROOM];
    if (!pw_is_fixed(&results->realisation)) return strcpy(buffer, "");
    if (!node->integrates) return strcpy(buffer, node->can_clip ? "can clip" : "cannot clip");
    if (!isfinite(node->samples_to_clip)) return strcpy(buffer, "integrates up to the clamp");
    snprintf(buffer, PW_FIGURE_ROOM, "clamps after %.40s",
             pw_samples(samples, node->samples_to_clip, results->stage->rate_hz));
    return buffer;
}

void pw_node_head(pw_table *table)
{
    const char *const head[] = {"node", "bound / FS", "headroom", "", ""};
    for (size_t i = 0; i < sizeof head / sizeof *head; i++) pw_table_cell(table, "%s", head[i]);
}

void pw_node_row(const pw_results *results, const pw_node *node, pw_table *table)
{
    char fate[PW_FIGURE_ROOM];
    bool known = isfinite(node->headroom_db) && pw_is_fixed(&results->realisation);
    pw_table_cell(table, "%s", node->name);
    pw_table_cell(table, isfinite(node->bound) ? "%.6f" : "unbounded", node->bound);
    pw_table_cell(table, known ? "%.2f dB" : "", node->headroom_db);
    pw_table_cell(table, known ? "%.2f bits" : "", node->headroom_db / (20 * log10(2)));
    pw_table_cell(table, "%s", pw_node_fate(results, node, fate));
}
