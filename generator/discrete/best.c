/* SPDX-License-Identifier: GPL-3.0-or-later */
/* `best`: every transform is made and measured over the band. */
#include <math.h>
#include <string.h>

#include "discrete/choice.h"
#include "discrete/errors.h"
#include "discrete/transforms.h"

/* Two magnitude errors this close are the same: their phases decide. */
#define SAME_DB 1e-6

bool pw_candidate_gain(const pw_stage *stage, const pw_roots *analog, const pw_candidate *how,
                       pw_digital *out)
{
    const pw_given *asked = &stage->transform.match_gain_hz;
    out->gain_matched = asked->given || how->method == PW_MATCHED_Z;
    if (!out->gain_matched) return true;
    out->match_gain_hz = asked->given ? asked->value : pw_gain_place(analog, stage->limits.band_hz);
    return pw_match_gain(analog, stage->rate_hz, out->match_gain_hz, &out->z);
}

void pw_candidate_judge(const pw_stage *stage, const pw_roots *analog, pw_candidate *how,
                        const pw_roots *z)
{
    pw_error_figures error;
    const pw_limits *limits = &stage->limits;
    pw_compare_digital(analog, z, stage->rate_hz, limits->band_hz, limits->floor_db, &error);
    how->magnitude_error_db = error.magnitude_db.max;
    how->phase_error_deg = error.phase_deg.max;
}

static void add(pw_digital *out, pw_candidate how)
{
    out->candidate[out->candidates++] = how;
}

static void list_bilinear(const pw_stage *stage, const pw_roots *analog, pw_digital *out)
{
    const pw_transform *t = &stage->transform;
    double corner = pw_dominant_corner(analog, stage->rate_hz);
    pw_candidate how = {.method = PW_BILINEAR, .prewarp = PW_PREWARP_NONE};
    if (t->prewarp == PW_PREWARP_AT) {       /* the user named one: the only bilinear form tried */
        how.prewarp = PW_PREWARP_AT;
        how.prewarp_hz = t->prewarp_hz;
        add(out, how);
        return;
    }
    if (t->prewarp != PW_PREWARP_EACH_SECTION) add(out, how);
    how.prewarp = PW_PREWARP_EACH_SECTION;
    if (t->prewarp != PW_PREWARP_NONE) add(out, how);
    how.prewarp = PW_PREWARP_AT;
    how.prewarp_hz = corner;
    if (t->prewarp == PW_PREWARP_DEFAULT && corner > 0) add(out, how);
}

static void list_candidates(const pw_stage *stage, const pw_roots *analog, pw_digital *out)
{
    int at_infinity = analog->poles - analog->zeros;
    list_bilinear(stage, analog, out);
    pw_candidate how = {.method = PW_MATCHED_Z, .prewarp = PW_PREWARP_NONE};
    add(out, how);
    how.zeros_at_infinity = PW_INFINITY_KEEP_ONE;
    if (at_infinity >= 1) add(out, how);
    how.zeros_at_infinity = PW_INFINITY_KEEP;
    if (at_infinity >= 2) add(out, how);
    how = (pw_candidate){.method = PW_IMPULSE_INVARIANT, .prewarp = PW_PREWARP_NONE};
    add(out, how);
    how.method = PW_STEP_INVARIANT;
    add(out, how);
}

/* Made, matched and judged; *z is the model. */
static void try_one(const pw_stage *stage, const pw_roots *analog, pw_candidate *how, pw_roots *z)
{
    pw_digital made;
    memset(&made, 0, sizeof made);
    how->possible = pw_candidate_make(stage, analog, how, &made.z);
    if (!how->possible) return;
    *z = made.z;
    how->possible = pw_candidate_gain(stage, analog, how, &made);
    if (how->possible) pw_candidate_judge(stage, analog, how, &made.z);
}

static bool better(const pw_candidate *a, const pw_candidate *b)
{
    if (a->possible != b->possible) return a->possible;
    if (!a->possible) return false;
    double differ = a->magnitude_error_db - b->magnitude_error_db;
    if (fabs(differ) > SAME_DB) return differ < 0;
    return a->phase_error_deg < b->phase_error_deg - SAME_DB;
}

bool pw_best(const pw_stage *stage, const pw_roots *analog, pw_digital *out)
{
    pw_roots z[PW_MAX_CANDIDATES];
    list_candidates(stage, analog, out);
    int n = out->candidates, order[PW_MAX_CANDIDATES];
    pw_candidate listed[PW_MAX_CANDIDATES];
    memcpy(listed, out->candidate, sizeof listed);
    for (int i = 0; i < n; i++) {
        try_one(stage, analog, &listed[i], &z[i]);
        int k = i;
        for (; k > 0 && better(&listed[i], &listed[order[k - 1]]); k--) order[k] = order[k - 1];
        order[k] = i;
    }
    for (int i = 0; i < n; i++) out->candidate[i] = listed[order[i]];
    if (!out->candidate[0].possible) return false;
    out->z = z[order[0]];
    return true;
}
