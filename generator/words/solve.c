/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Given structures: words, scales, proof, noise. */
#include "words/cycles.h"
#include "words/job.h"
#include "words/noise.h"
#include "words/search.h"

#include <math.h>
#include <string.h>

#define ROUNDS 6                 /* of giving way where rounding needs room */

/* The first section of the segment that section k lies in: behind the last integrator. */
static int segment_start(const pw_job *job, int k)
{
    int from = 0;
    for (int i = 0; i < k; i++)
        if (pw_section_has_integrator(&job->out->ideal[i]))
            from = i + 1;
    return from;
}

static bool direct_words(pw_job *job, int k, pw_words *w)
{
    const pw_section *section = &job->out->ideal[k];
    w->structure = job->structure[k];
    if (w->structure == PW_DIRECT_1_SHAPED) {
        pw_choose_feedback(section->a, &w->k1, &w->k2);
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
        return pw_quantise_coupled(&job->format, &r->ideal[k], job->gain[k], &r->section[from], k - from,
                                   from ? 1 : r->input_peak, job->inner[k], w)
            && pw_words_stable(&r->ideal[k], w);
    }
    return direct_words(job, k, w);
}

bool pw_job_words(pw_job *job)
{
    for (int k = 0; k < job->out->count; k++)
        if (!section_words(job, k)) {
            job->unstable = k + 1;
            return false;
        }
    return true;
}

static bool over(const pw_job *job, const pw_node *node, double *by)
{
    *by = node->bound / job->format.largest;
    return *by > 1 && *by <= 2 && !node->integrates;
}

/* Where rounding pushed a scaled node over full scale, its section gives way and the next one makes
 * up for it. True where something moved. */
static bool give_way(pw_job *job)
{
    pw_realisation *r = job->out;
    bool moved = false;
    double by;
    if (!job->format.fixed || r->scaling != PW_SCALING_L1)
        return false;
    for (int k = 0; k + 1 < r->count; k++)
        if (over(job, &r->node[k], &by)) {
            job->gain[k] /= by * 1.0005;
            job->gain[k + 1] *= by * 1.0005;
            moved = true;
        }
    for (int i = r->count; i < r->nodes; i++)
        if (r->section[r->node[i].section - 1].structure == PW_COUPLED && over(job, &r->node[i], &by)) {
            job->inner[r->node[i].section - 1] /= by * 1.0005;
            moved = true;
        }
    return moved;
}

bool pw_job_solve(pw_job *job)
{
    job->unstable = 0;
    memcpy(job->gain, job->start_gain, sizeof job->gain);
    for (int k = 0; k < job->out->count; k++)
        job->inner[k] = 0.999L;
    for (int round = 1;; round++) {
        pw_proof proof;
        if (!pw_job_words(job))
            return false;
        pw_proof_start(&job->format, job->out, &proof);
        pw_prove(&proof, job->out);
        bool again = round < ROUNDS && give_way(job);
        if (!again)
            pw_noise_find(&proof, job->stage, job->out, job->share);
        pw_proof_end(&proof);
        if (!again)
            return true;
    }
}
