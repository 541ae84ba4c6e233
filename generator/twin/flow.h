/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A record of input and output with the twin's output beside it, in volts, as often as it is asked
 * for. Short records stay in memory; long ones are read and replayed again each time. */
#ifndef PW_TWIN_FLOW_H
#define PW_TWIN_FLOW_H

#include "report/results.h"
#include "twin/channels.h"
#include "twin/record.h"

#define PW_FLOW_KEPT (1 << 22)   /* frames that are kept in memory, 24 bytes each */

typedef struct pw_frame { double input, output, twin; } pw_frame;   /* volts */

/* Equal samples at a record's largest or smallest value, four or more in a row. */
typedef struct pw_flat { double least, most; int64_t runs, samples; } pw_flat;

typedef struct pw_flow {
    const pw_results *results;
    const char *path;
    bool samples, quiet;
    pw_record record;
    bool open, kept, counted;
    pw_channels channels;
    double *raw, *played;
    pw_frame *kept_frames, *block;
    int64_t at;                  /* frames of this pass so far */
    /* known after the first pass: */
    int64_t frames;
    bool at_rest; /* the first eight inputs are alike: both sides are taken to be settled */
    pw_flat flat_input, flat_output;
    uint64_t clipped, outside,
        railed; /* twin: nodes that clipped, inputs clamped, outputs at a rail */
    struct pw_flat_watch *watch;
    struct pw_progress *progress;
} pw_flow;

/* results and path are borrowed. PW_WRONG with a line on standard error. */
PW_CHECKED pw_status pw_flow_open(const pw_results *results, const char *path, bool samples,
                                  bool quiet, pw_flow *out);
/* From the beginning again. */
PW_CHECKED pw_status pw_flow_rewind(pw_flow *flow);
/* The next frames; *got 0 at the end. *frames belongs to the flow until the next call. */
PW_CHECKED pw_status pw_flow_next(pw_flow *flow, const pw_frame **frames, size_t *got);
void pw_flow_close(pw_flow *flow);

#endif
