/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The spread that tolerances make: closed forms, threads, shards, files. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <cmocka.h>

#include <fcntl.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include "analog/spread.h"
#include "stagefile/read.h"

#define RC_LOWPASS "stage: a\nrate: 48 kHz\nanalog:\n  cell: {kind: rc-lowpass, " \
                   "R1: {value: 10k, tolerance: 1 %}, C1: {value: 10n, tolerance: 5 %}}\n"
#define RC_NORMAL "stage: a\nrate: 48 kHz\nanalog:\n  cell: {kind: rc-lowpass, " \
                  "R1: 10k, C1: {value: 10n, tolerance: 6 %, distribution: normal}}\n"
#define CASCADE "stage: a\nrate: 48 kHz\nlimits: {band: [100 Hz, 10 kHz]}\nanalog:\n  cascade:\n" \
                "  - cell: {kind: rc-lowpass, R1: {value: 10k, tolerance: 1 %}, C1: 10n}\n" \
                "  - roots: {poles: [-5 krad/s], gain: {at: 0 Hz, is: 2}}\n" \
                "  - cell: {kind: rc-highpass, R1: 10k, C1: {value: 100n, tolerance: 10 %}}\n"
#define EXACT "stage: a\nrate: 48 kHz\nanalog:\n  cell: {kind: rc-lowpass, R1: 10k, C1: 10n}\n"
/* Q = 1 / (3 - K): with K 2.9 and a tolerance of 10 % some draws have no positive Q */
#define NEARLY_UNSTABLE                                                                            \
    "stage: a\nrate: 48 kHz\nanalog:\n  cell: {kind: sallen-key-lowpass, R1: 10k, R2: 10k, "       \
    "C1: 10n, C2: 10n, R3: 10k, R4: {value: 19k, tolerance: 10 %}}\n"

typedef struct made { pw_stage stage; pw_roots analog; pw_messages messages; } made;

static void make(const char *yaml, int draws, made *m)
{
    pw_text text = {0};
    memset(m, 0, sizeof *m);
    m->messages.file = "test";
    pw_text_add(&text, yaml);
    assert_int_equal(pw_stage_read(&text, NULL, 0, &m->stage, &m->messages), PW_OK);
    assert_int_equal(pw_analog_build(&m->stage.analog, &m->analog, &m->messages), PW_OK);
    m->stage.spread.draws = draws;
    pw_text_free(&text);
}

static void unmake(made *m)
{
    pw_messages_free(&m->messages);
    pw_stage_free(&m->stage);
}

static pw_spread *compute(made *m, int threads, int shard, int shards)
{
    pw_spread_options options = {threads, shard, shards, true};
    pw_spread *spread = NULL;
    assert_int_equal(pw_spread_compute(&m->stage, &m->analog, &options, &spread, &m->messages),
                     PW_OK);
    return spread;
}

static double rc_db(double hz, double tau) { return -10 * log10(1 + pow(2 * M_PI * hz * tau, 2)); }
static double rc_deg(double hz, double tau) { return -atan(2 * M_PI * hz * tau) * 180 / M_PI; }

static double rc_delay(double hz, double tau)
{
    return tau / (1 + pow(2 * M_PI * hz * tau, 2));
}

/* Corners of an RC low-pass are the extremes of R C; draws stay inside and come near. */
static void corners_of_an_rc_lowpass(void **state)
{
    (void)state;
    made m;
    make(RC_LOWPASS, 2000, &m);
    pw_spread *s = compute(&m, 1, 0, 0);
    double slow = 1e-4 * 1.01 * 1.05, fast = 1e-4 * 0.99 * 0.95;
    assert_int_equal(s->parts, 2);
    assert_int_equal(s->rows, PW_SPREAD_ROWS);
    for (int i = 0; i < s->rows; i++) {
        const pw_spread_row *r = &s->row[i];
        assert_true(fabs(r->db.nominal - rc_db(r->hz, 1e-4)) < 1e-9);
        assert_true(fabs(r->db.corner_low - rc_db(r->hz, slow)) < 1e-9);
        assert_true(fabs(r->db.corner_high - rc_db(r->hz, fast)) < 1e-9);
        assert_true(fabs(r->deg.corner_low - rc_deg(r->hz, slow)) < 1e-8);
        assert_true(fabs(r->deg.corner_high - rc_deg(r->hz, fast)) < 1e-8);
        double ends[] = {rc_delay(r->hz, slow), rc_delay(r->hz, fast)};
        if (fabs(log(r->hz * 2 * M_PI * 1e-4)) > 0.1) { /* delay is not monotonic at the corner */
            assert_true(fabs(r->delay_s.corner_low - fmin(ends[0], ends[1])) < 1e-12);
            assert_true(fabs(r->delay_s.corner_high - fmax(ends[0], ends[1])) < 1e-12);
        }
        assert_true(r->db.low >= r->db.corner_low - 1e-9 && r->db.high <= r->db.corner_high + 1e-9);
        assert_true(r->db.high - r->db.low > 0.93 * (r->db.corner_high - r->db.corner_low));
        assert_true(r->db.low < r->db.nominal && r->db.nominal < r->db.high);
    }
    double worst =
        fmax(rc_db(19200, fast) - rc_db(19200, 1e-4), rc_db(19200, 1e-4) - rc_db(19200, slow));
    assert_true(fabs(s->worst_db - worst) < 1e-9 && s->worst_db_hz == 19200);
    assert_true(fabs(pw_spread_share_db(s, 0.05) - 0.05 / worst) < 1e-9);
    pw_spread_free(s);
    unmake(&m);
}

/* Normal: 3 sigma at the tolerance, so that few of many draws go beyond it, and some do. */
static void normal_draws_go_beyond(void **state)
{
    (void)state;
    made m;
    make(RC_NORMAL, 20000, &m);
    pw_spread *s = compute(&m, 2, 0, 0);
    const pw_spread_row *r = &s->row[s->rows - 1];
    /* the largest of 20,000 normal draws lies near 4 sigma: 8 % instead of 6 % */
    double at_4 = rc_db(r->hz, 1e-4 * 1.08), at_5 = rc_db(r->hz, 1e-4 * 1.10),
           at_3_5 = rc_db(r->hz, 1e-4 * 1.07);
    assert_true(r->db.low < at_3_5 && r->db.low > at_5);
    assert_true(fabs(r->db.low - at_4) < 0.15);
    assert_true(fabs(r->db.corner_low - rc_db(r->hz, 1e-4 * 1.06)) < 1e-9);
    pw_spread_free(s);
    unmake(&m);
}

/* A cascade's parts move its product; the roots between them stand. */
static void cascade_multiplies(void **state)
{
    (void)state;
    made m;
    make(CASCADE, 100, &m);
    pw_spread *s = compute(&m, 1, 0, 0);
    assert_int_equal(s->parts, 2);
    for (int i = 0; i < s->rows; i++) {
        const pw_spread_row *r = &s->row[i];
        double w = 2 * M_PI * r->hz;
        double fixed = 20 * log10(2) - 10 * log10(1 + pow(w / 5000, 2));
        double low = rc_db(r->hz, 1.01e-4) - 10 * log10(1 + 1 / pow(w * 0.9e-3, 2)) + fixed;
        double high = rc_db(r->hz, 0.99e-4) - 10 * log10(1 + 1 / pow(w * 1.1e-3, 2)) + fixed;
        assert_true(fabs(r->db.corner_low - low) < 1e-9 && fabs(r->db.corner_high - high) < 1e-9);
    }
    pw_spread_free(s);
    unmake(&m);
}

static void nothing_without_tolerances(void **state)
{
    (void)state;
    made m;
    make(EXACT, 100, &m);
    assert_false(pw_spread_applies(&m.stage));
    assert_null(compute(&m, 1, 0, 0));
    unmake(&m);
}

static void unstable_draws_are_counted(void **state)
{
    (void)state;
    made m;
    make(NEARLY_UNSTABLE, 4000, &m);
    assert_true(pw_spread_applies(&m.stage));
    pw_spread *s = compute(&m, 2, 0, 0);
    /* unstable where K = 1 + R4/R3 > 3: R4 above 20k, of 17.1k .. 20.9k: 0.9 of 3.8 */
    assert_true(fabs((double)s->unstable / 4000 - 0.9 / 3.8) < 0.002);
    pw_spread_free(s);
    unmake(&m);
}

static void as_text(const pw_spread *s, pw_text *out)
{
    pw_text_free(out);
    pw_spread_write(s, out);
}

static void threads_do_not_matter(void **state)
{
    (void)state;
    made m;
    pw_text one = {0}, many = {0};
    make(RC_LOWPASS, 5000, &m);
    for (int threads = 1; threads <= 7; threads += 3) {
        pw_spread *s = compute(&m, threads, 0, 0);
        as_text(s, threads == 1 ? &one : &many);
        if (threads > 1) assert_string_equal(pw_text_string(&one), pw_text_string(&many));
        pw_spread_free(s);
    }
    pw_text_free(&one);
    pw_text_free(&many);
    unmake(&m);
}

/* Shards, written, read back and merged in any order, are the whole, to the last bit. */
static void shards_make_the_whole(void **state)
{
    (void)state;
    static const int order[] = {3, 1, 4, 2};
    made m;
    pw_text text = {0}, whole = {0};
    pw_spread *merged = NULL;
    make(NEARLY_UNSTABLE, 5003, &m);
    pw_spread *all = compute(&m, 2, 0, 0);
    as_text(all, &whole);
    for (int i = 0; i < 4; i++) {
        pw_spread *shard = compute(&m, 1, order[i], 4), *read = NULL;
        as_text(shard, &text);
        assert_int_equal(pw_spread_read("shard", &text, &read), PW_OK);
        if (!merged) merged = read;
        else {
            assert_int_equal(pw_spread_merge(merged, read, "shard"), PW_OK);
            pw_spread_free(read);
        }
        pw_spread_free(shard);
    }
    assert_int_equal(merged->drawn, 5003);
    assert_int_equal(merged->dones, 1);
    as_text(merged, &text);
    assert_string_equal(pw_text_string(&text), pw_text_string(&whole));
    assert_true(merged->worst_db == all->worst_db);
    pw_spread_free(merged);
    pw_spread_free(all);
    pw_text_free(&text);
    pw_text_free(&whole);
    unmake(&m);
}

static void shards_of_other_studies_are_refused(void **state)
{
    (void)state;
    made m;
    make(RC_LOWPASS, 100, &m);
    pw_spread *first = compute(&m, 1, 1, 2), *again = compute(&m, 1, 1, 2);
    assert_int_equal(pw_spread_merge(first, again, "again"), PW_WRONG);        /* the same draws */
    pw_spread_free(again);
    m.stage.spread.seed = 2;
    pw_spread *other = compute(&m, 1, 2, 2);
    assert_int_equal(pw_spread_merge(first, other, "other"), PW_WRONG);
    other->seed = first->seed;
    other->sha256[0] ^= 1;
    assert_int_equal(pw_spread_merge(first, other, "other"), PW_WRONG);
    pw_spread_free(other);
    pw_spread_free(first);
    unmake(&m);
}

/* Every truncation and a change of any early byte is refused, or gives a struct: never a crash. */
static void damaged_files_are_refused(void **state)
{
    (void)state;
    made m;
    pw_text text = {0};
    pw_spread *read = NULL;
    make(RC_LOWPASS, 10, &m);
    pw_spread *s = compute(&m, 1, 0, 0);
    pw_spread_write(s, &text);
    size_t size = text.size;
    fflush(stderr);
    int loud = dup(2), quiet = open("/dev/null", O_WRONLY);
    assert_true(loud >= 0 && quiet >= 0 && dup2(quiet, 2) == 2);
    for (size_t cut = 0; cut < size; cut += cut < 400 ? 1 : 997) {
        pw_text part = {0};
        pw_text_add_bytes(&part, text.data, cut);
        assert_int_equal(pw_spread_read("cut", &part, &read), PW_WRONG);
        assert_null(read);
        pw_text_free(&part);
    }
    for (size_t i = 0; i < 400; i++) {
        char old = text.data[i];
        text.data[i] = '-';
        if (pw_spread_read("changed", &text, &read) == PW_OK) pw_spread_free(read);
        text.data[i] = old;
    }
    fflush(stderr);
    assert_int_equal(dup2(loud, 2), 2);
    close(loud);
    close(quiet);
    pw_spread_free(s);
    pw_text_free(&text);
    unmake(&m);
}

static void envelope_between_rows(void **state)
{
    (void)state;
    made m;
    double db[2], deg[2], delay[2];
    make(RC_LOWPASS, 200, &m);
    pw_spread *s = compute(&m, 1, 0, 0);
    for (double hz = 5; hz < 19000; hz *= 1.37) {
        pw_spread_envelope(s, hz, db, deg, delay);
        assert_true(fabs(db[0] - rc_db(hz, 1e-4 * 1.01 * 1.05)) < 0.003);
        assert_true(fabs(db[1] - rc_db(hz, 1e-4 * 0.99 * 0.95)) < 0.003);
        assert_true(deg[0] < rc_deg(hz, 1e-4) && rc_deg(hz, 1e-4) < deg[1]);
    }
    pw_spread_envelope(s, 1, db, deg, delay);
    assert_true(db[0] == fmin(s->row[0].db.low, s->row[0].db.corner_low));
    pw_spread_free(s);
    unmake(&m);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(corners_of_an_rc_lowpass),
        cmocka_unit_test(normal_draws_go_beyond),
        cmocka_unit_test(cascade_multiplies),
        cmocka_unit_test(nothing_without_tolerances),
        cmocka_unit_test(unstable_draws_are_counted),
        cmocka_unit_test(threads_do_not_matter),
        cmocka_unit_test(shards_make_the_whole),
        cmocka_unit_test(shards_of_other_studies_are_refused),
        cmocka_unit_test(damaged_files_are_refused),
        cmocka_unit_test(envelope_between_rows),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
