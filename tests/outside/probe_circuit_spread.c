/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The spread of a stage file on standard input: probe_circuit_spread DRAWS THREADS [SHARD SHARDS].
 * Prints the shard file; time of the computation on standard error. */
#include <stdio.h>
#include <stdlib.h>
#include <time.h>

#include "analog/spread.h"
#include "base/files.h"
#include "stagefile/read.h"

static double now(void)
{
    struct timespec t;
    clock_gettime(CLOCK_MONOTONIC, &t);
    return (double)t.tv_sec + 1e-9 * (double)t.tv_nsec;
}

int main(int argc, char **argv)
{
    static pw_stage stage;
    pw_messages messages = {.file = "stdin"};
    pw_text yaml = {0}, out = {0};
    pw_roots analog;
    struct pw_spread *spread = NULL;
    if (argc < 3 || pw_file_read("-", 1 << 20, &yaml)) return 2;
    pw_spread_options options = {.threads = atoi(argv[2]), .shard = argc > 4 ? atoi(argv[3]) : 0,
                                 .shards = argc > 4 ? atoi(argv[4]) : 0, .quiet = true};
    pw_status status = pw_stage_read(&yaml, NULL, 0, &stage, &messages);
    if (!status) status = pw_analog_build(&stage.analog, &analog, &messages);
    stage.spread.draws = atoi(argv[1]);
    double began = now();
    if (!status) status = pw_spread_compute(&stage, &analog, &options, &spread, &messages);
    fprintf(stderr, "%.3f s\n", now() - began);
    pw_messages_print(&messages, stderr, false);
    if (spread) {
        pw_spread_write(spread, &out);
        fwrite(out.data, 1, out.size, stdout);
        fprintf(stderr, "worst %.6f dB at %.4g Hz, %.4f deg at %.4g Hz\n", spread->worst_db,
                spread->worst_db_hz, spread->worst_deg, spread->worst_deg_hz);
    }
    pw_spread_free(spread);
    pw_text_free(&out);
    pw_text_free(&yaml);
    pw_stage_free(&stage);
    pw_messages_free(&messages);
    return (int)status;
}
