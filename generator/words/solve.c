/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Given structures: words, scales, proof, noise. */
#include "words/cycles.h"
#include "words/job.h"
#include "words/noise.h"
#include "words/search.h"

#include <math.h>
#include <string.h>

#define ROUNDS 6                 /* of moving scales to where rounding leaves them */

/* The first section of the segment that section k lies in: behind the last integrator. */
static int segment_start(const pw_job *job, int k)
{
    int from = 0;
    for (int i = 0; i < k; i++)
        if (pw_section_has_integrator(&job->out->ideal[i]))
            from = i + 1;
    return from;
}

bool pw_integrates_from(const pw_realisation *r, int k)
{
    while (k < r->count && !pw_section_has_integrator(&r->ideal[k]))
        k++;
    return k < r->count;
}

static bool direct_words(pw_job *job, int k, pw_words *w)
{
    const pw_section *section = &job->out->ideal[k];
    w->structure = job->structure[k];
    if (w->structure == PW_DIRECT_1_SHAPED) {
        pw_choose_feedback(section->a, pw_integrates_from(job->out, k), &w->k1, &w->k2);
        if (w->k1 == 0 && w->k2 == 0)
            w->structure = PW_DIRECT_1;
    }
    if (!pw_quantise_direct(&job->format, section, job->gain[k], w))
        return false;
    pw_refine_words(&job->format, section, job->gain[k], &job->band, w);
    return pw_words_stable(section, w);
}

static bool section_words(pw_job *job, int k)
{
    pw_realisation *r = job->out;
    pw_words *w = &r->section[k];
    memset(w, 0, sizeof *w);
    w->order = r->ideal[k].order;
    if (!job->format.fixed) {
        w->structure = job->structure[k];
        pw_quantise_float(&job->format, &r->ideal[k], job->gain[k], w);
        pw_refine_words(&job->format, &r->ideal[k], job->gain[k], &job->band, w);
        return pw_words_stable(&r->ideal[k], w);
    }
    if (job->structure[k] == PW_COUPLED) {
        int from = segment_start(job, k);
        return pw_quantise_coupled(&job->format, &r->ideal[k], job->gain[k], &r->section[from],
                                   k - from,
                                   from ? 1 : r->input_peak, job->inner[k], w)
            && pw_words_stable(&r->ideal[k], w);
    }
    return direct_words(job, k, w);
}

static bool all_words(pw_job *job)
{
    for (int k = 0; k < job->out->count; k++)
        if (!section_words(job, k)) {
            job->unstable = k + 1;
            return false;
        }
    return true;
}

/* The factor that brings a node to just below full scale; 1 where rounding takes most of it, and
 * where it stands well. */
static double correction(const pw_job *job, double gain, double rounding, double peak)
{
    double largest = job->format.largest, room = largest * (1 - 1e-5) - rounding;
    double now = peak * gain + rounding;
    if (!(room > 0.4 * largest) || (now <= largest && now >= 0.998 * largest))
        return 1;
    return room / (peak * gain);
}

/* Moves every scaled section to just below full scale, rounding included; the next one makes up for
 * it. True where something moved. */
static bool settle_scales(pw_job *job, const pw_proof *proof)
{
    pw_realisation *r = job->out;
    bool moved = false;
    double peak = r->input_peak, before = 1;
    if (!job->format.fixed)
        return false;
    for (int k = 0; k < r->count; k++) {
        bool free = r->scaling == PW_SCALING_L1 && k + 1 < r->count && r->ideal[k].order > 0
                 && !proof->paths.integrates[k];
        double by = free ? correction(job, proof->gain[k], proof->rounding[k], peak) : 1;
        job->gain[k] *= by / before;
        if (r->section[k].structure == PW_COUPLED) {
            double in = correction(job, proof->inner_gain[k], proof->inner_rounding[k], peak);
            in = in > 1 ? 1 : in;
            job->inner[k] *= in;
            moved = moved || in != 1;
        }
        moved = moved || by != 1;
        before = by;
        if (proof->paths.integrates[k])
            peak = 1;
    }
    return moved;
}

static void start(pw_job *job)
{
    job->unstable = 0;
    memcpy(job->gain, job->start_gain, sizeof job->gain);
    for (int k = 0; k < job->out->count; k++)
        job->inner[k] = 0.999L;
}

bool pw_job_words(pw_job *job)
{
    start(job);
    return all_words(job);
}

bool pw_job_solve(pw_job *job)
{
    start(job);
    for (int round = 1;; round++) {
        if (!all_words(job))
            return false;
        pw_job_free(job);
        pw_proof_start(&job->format, job->out, &job->proof);
        pw_prove(&job->proof, job->out);
        if (round == ROUNDS || !settle_scales(job, &job->proof))
            break;
    }
    pw_noise_find(&job->proof, job->stage, job->out, job->share);
    return true;
}

void pw_job_free(pw_job *job)
{
    pw_proof_end(&job->proof);
}
