/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Fixed-point sections in lanes: AVX-512 has every operation; AVX2 lacks 64-bit arithmetic shifts
 * and minima, which are put together from what it has. */
#include <string.h>

#include "simulate/inner.h"
#include "twin/replay_inner.h"

#if defined(__x86_64__)
#include <immintrin.h>

#define WIDE __attribute__((target("avx512f,avx512vl,avx512dq,avx512bw")))
#define INLINE static inline __attribute__((always_inline))

INLINE WIDE __m512i all512(int64_t v) { return _mm512_set1_epi64(v); }
INLINE WIDE __m512i down512(__m512i v) { return _mm512_alignr_epi64(v, v, 1); }
INLINE WIDE __m512i pick512(__m512i mask, __m512i a, __m512i b)
{
    return _mm512_ternarylogic_epi64(mask, a, b, 0xCA);
}
INLINE WIDE __m512i same512(__m512i a, __m512i b)
{
    return _mm512_movm_epi64(_mm512_cmpeq_epi64_mask(a, b));
}
INLINE WIDE __m512i extend512(__m512i v, int spare)
{
    __m128i by = _mm_cvtsi32_si128(spare);
    return _mm512_sra_epi64(_mm512_sll_epi64(v, by), by);
}

#define NAME(x) x##_avx512
#define TARGET WIDE
#define VECTOR __m512i
#define GET(p) _mm512_loadu_si512(p)
#define PUT(p, v) _mm512_storeu_si512(p, v)
#define ALL(v) all512(v)
#define ADD(a, b) _mm512_add_epi64(a, b)
#define SUB(a, b) _mm512_sub_epi64(a, b)
#define MUL(a, b) _mm512_mul_epi32(a, b)
#define AND(a, b) _mm512_and_si512(a, b)
#define NOT(a) _mm512_xor_si512(a, _mm512_set1_epi64(-1))
#define SHIFT_RIGHT(a, b) _mm512_srav_epi64(a, b)
#define SHIFT_LEFT(a, b) _mm512_sllv_epi64(a, b)
#define LEAST(a, b) _mm512_min_epi64(a, b)
#define MOST(a, b) _mm512_max_epi64(a, b)
#define SAME(a, b) same512(a, b)
#define PICK(mask, a, b) pick512(mask, a, b)
#define DOWN(v) down512(v)
#define EXTEND(v, spare) extend512(v, spare)
#define FIRST(v) _mm_cvtsi128_si32(_mm512_castsi512_si128(v))
#include "twin/replay_words.h"
#undef NAME
#undef TARGET
#undef VECTOR
#undef GET
#undef PUT
#undef ALL
#undef ADD
#undef SUB
#undef MUL
#undef AND
#undef NOT
#undef SHIFT_RIGHT
#undef SHIFT_LEFT
#undef LEAST
#undef MOST
#undef SAME
#undef PICK
#undef DOWN
#undef EXTEND
#undef FIRST

/* ---- AVX2: eight lanes are two vectors ---- */

#define NARROW __attribute__((target("avx2")))
typedef struct pair { __m256i a, b; } pair;

#define EACH(NAME, OP)                                                                             \
    INLINE NARROW pair NAME(pair v, pair w) { return (pair){OP(v.a, w.a), OP(v.b, w.b)}; }

INLINE NARROW __m256i right256(__m256i v, __m256i by)
{
    const __m256i sign = _mm256_set1_epi64x(INT64_MIN);
    return _mm256_sub_epi64(_mm256_srlv_epi64(_mm256_xor_si256(v, sign), by),
                            _mm256_srlv_epi64(sign, by));
}

INLINE NARROW __m256i least256(__m256i v, __m256i w)
{
    return _mm256_blendv_epi8(v, w, _mm256_cmpgt_epi64(v, w));
}
INLINE NARROW __m256i most256(__m256i v, __m256i w)
{
    return _mm256_blendv_epi8(w, v, _mm256_cmpgt_epi64(v, w));
}

EACH(add2, _mm256_add_epi64)
EACH(sub2, _mm256_sub_epi64)
EACH(mul2, _mm256_mul_epi32)
EACH(and2, _mm256_and_si256)
EACH(left2, _mm256_sllv_epi64)
EACH(right2, right256)
EACH(least2, least256)
EACH(most2, most256)
EACH(same2, _mm256_cmpeq_epi64)

INLINE NARROW pair all2(int64_t v) { return (pair){_mm256_set1_epi64x(v), _mm256_set1_epi64x(v)}; }
INLINE NARROW pair get2(const int64_t *p)
{
    return (pair){_mm256_loadu_si256((const __m256i *)p),
                  _mm256_loadu_si256((const __m256i *)(p + 4))};
}
INLINE NARROW void put2(int64_t *p, pair v)
{
    _mm256_storeu_si256((__m256i *)p, v.a);
    _mm256_storeu_si256((__m256i *)(p + 4), v.b);
}
INLINE NARROW pair not2(pair v)
{
    const __m256i ones = _mm256_set1_epi64x(-1);
    return (pair){_mm256_xor_si256(v.a, ones), _mm256_xor_si256(v.b, ones)};
}
INLINE NARROW pair pick2(pair mask, pair v, pair w)
{
    return (pair){_mm256_blendv_epi8(w.a, v.a, mask.a), _mm256_blendv_epi8(w.b, v.b, mask.b)};
}
INLINE NARROW pair down2(pair v)   /* 1 2 3 4 | 5 6 7 0 */
{
    __m256i a = _mm256_blend_epi32(v.a, v.b, 3), b = _mm256_blend_epi32(v.b, v.a, 3);
    return (pair){_mm256_permute4x64_epi64(a, 0x39), _mm256_permute4x64_epi64(b, 0x39)};
}
INLINE NARROW pair extend2(pair v, int spare)
{
    __m128i by = _mm_cvtsi32_si128(spare);
    pair shift = all2(spare);
    v = (pair){_mm256_sll_epi64(v.a, by), _mm256_sll_epi64(v.b, by)};
    return right2(v, shift);
}

#define NAME(x) x##_avx2
#define TARGET NARROW
#define VECTOR pair
#define GET(p) get2(p)
#define PUT(p, v) put2(p, v)
#define ALL(v) all2(v)
#define ADD(a, b) add2(a, b)
#define SUB(a, b) sub2(a, b)
#define MUL(a, b) mul2(a, b)
#define AND(a, b) and2(a, b)
#define NOT(a) not2(a)
#define SHIFT_RIGHT(a, b) right2(a, b)
#define SHIFT_LEFT(a, b) left2(a, b)
#define LEAST(a, b) least2(a, b)
#define MOST(a, b) most2(a, b)
#define SAME(a, b) same2(a, b)
#define PICK(mask, a, b) pick2(mask, a, b)
#define DOWN(v) down2(v)
#define EXTEND(v, spare) extend2(v, spare)
#define FIRST(v) _mm_cvtsi128_si32(_mm256_castsi256_si128((v).a))
#include "twin/replay_words.h"

void pw_lanes_words(pw_simulation *sim, int first, int m, int32_t *io, size_t n)
{
    if (pw_replay_reach() == PW_REACH_AVX512) run_avx512(sim, first, m, io, n);
    else run_avx2(sim, first, m, io, n);
}

#else

/* Never reached: pw_replay_words asks the processor first. */
void pw_lanes_words(pw_simulation *sim, int first, int m, int32_t *io, size_t n)
{
    (void)sim, (void)first, (void)m, (void)io, (void)n;
}

#endif
