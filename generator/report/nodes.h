/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The table of nodes: bound, headroom and whether it clips. */
#ifndef PW_REPORT_NODES_H
#define PW_REPORT_NODES_H

#include "report/results.h"
#include "report/table.h"

#define PW_NODE_ALIGN "lrrrl"

void pw_node_head(pw_table *table);
void pw_node_row(const pw_results *results, const pw_node *node, pw_table *table);

/* "can clip", "cannot clip", "clamps after 812 samples (101 ms)", "" for floats, in buffer
 * (PW_FIGURE_ROOM bytes), which is returned. */
char *pw_node_fate(const pw_results *results, const pw_node *node, char *buffer);

#endif
