/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A study of tolerances in shards, for a batch system: each run draws a share, one joins them. */
#ifndef PW_VERBS_SPREAD_SHARDS_H
#define PW_VERBS_SPREAD_SHARDS_H

#include "verbs/verbs.h"

/* share: "I/N", 1 <= I <= N. Writes the shard to call->directory as a file. */
PW_CHECKED pw_status pw_spread_share(const pw_call *call, const char *share);

/* from: a directory, of which every *.spread file is taken, or file names divided by commas. Prints
 * the spread (as JSON with --json), and writes the merged shard to -o FILE where that is given. A
 * study that lacks draws is told, and is PW_NOT_MET. */
PW_CHECKED pw_status pw_spread_join(const pw_call *call, const char *from);

#endif
