/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Float sections in lanes, for each instruction set. Compiled without contraction, as simulate/. */
#include <string.h>

#include "twin/replay_inner.h"

#if defined(__x86_64__)
#define WITH_AVX 1
#endif

#define REAL double
#define WHOLE int64_t
#define SIGN INT64_MIN
#define TARGET
#define NAME(x) x##_f64
#define WIDTH 2
#include "twin/replay_lanes.h"
#undef WIDTH
#undef TARGET
#undef NAME
#ifdef WITH_AVX
#define TARGET __attribute__((target("avx2")))
#define NAME(x) x##_f64_avx2
#define WIDTH 4
#include "twin/replay_lanes.h"
#undef WIDTH
#undef TARGET
#undef NAME
#define TARGET __attribute__((target("avx512f,avx512vl,avx512dq,avx512bw,prefer-vector-width=512")))
#define NAME(x) x##_f64_avx512
#define WIDTH 4
#include "twin/replay_lanes.h"
#undef WIDTH
#undef TARGET
#undef NAME
#endif
#undef REAL
#undef WHOLE
#undef SIGN

#define REAL float
#define WHOLE int32_t
#define SIGN INT32_MIN
#define TARGET
#define NAME(x) x##_f32
#define WIDTH 4
#include "twin/replay_lanes.h"
#undef WIDTH
#undef TARGET
#undef NAME
#ifdef WITH_AVX
#define TARGET __attribute__((target("avx2")))
#define NAME(x) x##_f32_avx2
#define WIDTH 8
#include "twin/replay_lanes.h"
#undef WIDTH
#undef TARGET
#undef NAME
#define TARGET __attribute__((target("avx512f,avx512vl,avx512dq,avx512bw")))
#define NAME(x) x##_f32_avx512
#define WIDTH 8
#include "twin/replay_lanes.h"
#undef WIDTH
#undef TARGET
#undef NAME
#endif

void pw_lanes_float64(pw_simulation *sim, int first, int m, double *io, size_t n)
{
#ifdef WITH_AVX
    if (pw_replay_reach() == PW_REACH_AVX512) run_f64_avx512(sim, first, m, io, n);
    else if (pw_replay_reach() == PW_REACH_AVX2) run_f64_avx2(sim, first, m, io, n);
    else
#endif
        run_f64(sim, first, m, io, n);
}

void pw_lanes_float32(pw_simulation *sim, int first, int m, float *io, size_t n)
{
#ifdef WITH_AVX
    if (pw_replay_reach() == PW_REACH_AVX512) run_f32_avx512(sim, first, m, io, n);
    else if (pw_replay_reach() == PW_REACH_AVX2) run_f32_avx2(sim, first, m, io, n);
    else
#endif
        run_f32(sim, first, m, io, n);
}
