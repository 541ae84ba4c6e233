/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "emit/kernel.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

/* What is known of one section's sums, each bound worst case over every state word:
 * full is the largest |sample| (2^15 or 2^31). */
typedef struct facts {
    const pw_words *w;
    bool q15, wrap, clips, two;
    int F, right, left;
    int64_t half, right_half;
    double full, b_sum, a_sum;       /* sums of |words| */
} facts;

static facts facts_of(const pw_realisation *r, int section)
{
    const pw_words *w = &r->section[section];
    facts f = {.w = w, .q15 = r->sample == PW_Q15, .wrap = r->wrap, .clips = !w->cannot_clip, .two = w->order == 2};
    int shift = w->b_fraction - w->a_fraction;
    f.F = w->a_fraction;
    f.right = shift > 0 ? shift : 0;
    f.left = shift < 0 ? -shift : 0;
    f.half = r->truncate || f.F == 0 ? 0 : INT64_C(1) << (f.F - 1);
    f.right_half = f.right ? INT64_C(1) << (f.right - 1) : 0;
    f.full = f.q15 ? 32768.0 : 2147483648.0;
    for (int i = 0; i < 3; i++) f.b_sum += fabs((double)w->b[i]);
    f.a_sum = fabs((double)w->a[1]) + fabs((double)w->a[2]);
    return f;
}

/* Left shifts of b are free where the shifted words fit. */
static void fold_left(facts *f, int32_t b[3])
{
    memcpy(b, f->w->b, sizeof f->w->b);
    if (!f->left || f->left > 30) return;
    for (int i = 0; i < 3; i++)
        if (fabs(ldexp((double)b[i], f->left)) >= (f->q15 ? 32767.0 : 2147483647.0)) return;
    for (int i = 0; i < 3; i++) b[i] = (int32_t)((uint32_t)b[i] << f->left);
    f->left = 0;
}

/* Largest |acc|, in steps of the accumulator. */
static double largest(const facts *f)
{
    return (ldexp(f->b_sum, f->left - f->right) + f->a_sum) * f->full + 1.0 + (double)f->half;
}

/* 16-bit words; p with its rounding stays inside int32_t where it is shifted, and the end of the
 * sum does: by the proof of the whole stage, or whatever the state. */
static bool fits_32(const facts *f)
{
    const pw_words *w = f->w;
    for (int i = 0; i < 3; i++)
        if (abs(w->b[i]) > 32768 || (i && abs(w->a[i]) > 32768)) return false;
    if (!f->q15 || f->left || f->F == 0) return false;
    if (f->right == 0) return w->fits_32 || largest(f) < 2147483648.0;
    double extra = (double)f->right_half + ldexp((double)f->half, f->right);
    return f->right < 31 && f->b_sum * f->full + extra < 2147483648.0 && largest(f) < 2147483648.0;
}

static void set_bits(pw_template_values *v, const char *low, const char *high, uint32_t bits)
{
    uint32_t first = bits & (~bits + 1u);
    pw_template_set_number(v, low, bits ? first : 0);
    pw_template_set_number(v, high, bits & ~first);
}

static void set_common(pw_template_values *v, const facts *f)
{
    pw_template_set(v, "sample", f->q15 ? "int16_t" : "int32_t");
    pw_template_set(v, "lowest", f->q15 ? "INT16_MIN" : "INT32_MIN");
    pw_template_set(v, "highest", f->q15 ? "INT16_MAX" : "INT32_MAX");
    pw_template_set(v, "attribute", "");
    pw_template_set_number(v, "q15", f->q15);
    pw_template_set_number(v, "bytes", f->q15 ? 2 : 4);
    pw_template_set_number(v, "log_bytes", f->q15 ? 1 : 2);
    pw_template_set_number(v, "half_bit", f->half ? f->F - 1 : 0);
    pw_template_set(v, "load", f->q15 ? "ldrsh" : "ldr");
    pw_template_set(v, "store", f->q15 ? "strh" : "str");
    pw_template_set_number(v, "clips", f->clips);
    pw_template_set_number(v, "wrap", f->wrap);
    pw_template_set_number(v, "two", f->two);
    pw_template_set_number(v, "F", f->F);
    pw_template_set_number(v, "G", 32 - f->F);
    pw_template_set_number(v, "right", f->right);
    pw_template_set_number(v, "right_rest", 32 - f->right);
    pw_template_set_number(v, "left", f->left);
    pw_template_set_number(v, "left_rest", 32 - f->left);
    pw_template_set_number(v, "half", f->half);
    pw_template_set_number(v, "right_half", f->right_half);
}

static bool direct(const pw_realisation *r, int section)
{
    const pw_words *w = &r->section[section];
    return (r->sample == PW_Q15 || r->sample == PW_Q31) && w->structure == PW_DIRECT_1 && w->order > 0
        && w->a[1] != INT32_MIN && w->a[2] != INT32_MIN;
}

static void take_words(pw_kernel *k, const int32_t b[3], const int32_t a[3])
{
    const int32_t plain[5] = {b[0], b[1], b[2], -a[1], -a[2]};
    memcpy(k->word + k->words, plain, sizeof plain);
    k->words += 5;
}

/* Whether the second rounding may be added before the shift of p: (p + h 2^s) >> s = (p >> s) + h. */
static bool folds(const facts *f)
{
    return f->right && f->half && f->right + f->F < 60
        && f->b_sum * f->full + ldexp((double)f->half, f->right) + (double)f->right_half < 9.2e18;
}

/* The roundings before the shift, both at once where they fit, as two words of two bits at most. */
static void plan_wide(pw_kernel *k, const facts *f)
{
    pw_template_values *v = &k->values;
    bool fold = folds(f);
    uint64_t added = (uint64_t)f->right_half + (fold ? (uint64_t)f->half << f->right : 0);
    pw_template_set_number(v, "carry", f->half && !fold);
    pw_template_set_number(v, "far", f->right >= 32 ? f->right - 32 : 0);
    set_bits(v, "round_low", "round_low2", (uint32_t)added);
    set_bits(v, "round_high", "round_high2", (uint32_t)(added >> 32));
}

static bool choose_armv7(const facts *given, pw_kernel *k)
{
    facts f = *given;
    int32_t b[3];
    fold_left(&f, b);
    if (f.F == 0 || f.left > 31 || f.right == 32) return false;
    if (f.q15 && largest(&f) >= ldexp(1.0, 31 + f.F)) return false;
    *k = (pw_kernel){.file = "armv7-m", .kernel = "wide", .values = k->values, .multiple = 2, .clamps = f.clips,
                     .why = "64-bit sum by long multiply-accumulate"};
    set_common(&k->values, &f);
    take_words(k, b, f.w->a);
    plan_wide(k, &f);
    return true;
}

/* The vector unit takes four taps at once. It adds both roundings before the shift of b, or none. */
static bool choose_vector(const facts *given, pw_kernel *k)
{
    facts f = *given;
    int32_t b[3];
    fold_left(&f, b);
    if (f.q15 || f.wrap || f.left || f.right > 32 || f.F == 0 || (f.right && f.half && !folds(&f))) return false;
    *k = (pw_kernel){.file = "armv8.1-m", .kernel = "vector", .values = k->values, .multiple = 2, .clamps = f.clips,
                     .needs_form = f.clips, .why = "64-bit sum by multiply and add across a vector"};
    set_common(&k->values, &f);
    take_words(k, b, f.w->a);
    uint64_t added = f.right ? (uint64_t)f.right_half + ((uint64_t)f.half << f.right) : (uint64_t)f.half;
    set_bits(&k->values, "round_low", "round_low2", (uint32_t)added);
    set_bits(&k->values, "round_high", "round_high2", (uint32_t)(added >> 32));
    return true;
}

static bool choose_armv6(const facts *given, pw_kernel *k)
{
    facts f = *given;
    int32_t b[3];
    bool narrow = fits_32(&f);
    fold_left(&f, b);
    if (f.F == 0 || f.left > 31 || f.right == 32) return false;
    if (f.q15 && largest(&f) >= ldexp(1.0, 31 + f.F)) return false;
    *k = (pw_kernel){.file = "armv6-m", .kernel = narrow ? "narrow" : "wide", .values = k->values, .multiple = 2,
                     .clamps = f.clips, .narrow = narrow,
                     .why = narrow ? "32-bit sum" : "64-bit sum of products of halves"};
    set_common(&k->values, &f);
    pw_template_set_number(&k->values, "far", f.right >= 32 ? f.right - 32 : 0);
    take_words(k, b, f.w->a);
    return true;
}

static const char *const avr_word[5] = {"b0", "b1", "b2", "a1", "a2"};

/* Sign and magnitude of every word, byte by byte; the sum of the a (negated) and b words. */
static void plan_avr_words(pw_template_values *v, const int32_t b[3], const int32_t a[3], int bytes)
{
    static const char *const suffix[] = {"low", "high", "byte2", "byte3"};
    for (int i = 0; i < 5; i++) {
        int64_t value = i < 3 ? b[i] : -(int64_t)a[i - 2];
        uint64_t size = (uint64_t)(value < 0 ? -value : value);
        pw_template_set(v, pw_arena_print(v->arena, "%s_add", avr_word[i]), value < 0 ? "sub" : "add");
        pw_template_set(v, pw_arena_print(v->arena, "%s_adc", avr_word[i]), value < 0 ? "sbc" : "adc");
        pw_template_set_number(v, pw_arena_print(v->arena, "%s_any", avr_word[i]), size != 0);
        for (int k = 0; k < bytes; k++)
            pw_template_set_number(v, pw_arena_print(v->arena, "%s_%s", avr_word[i], suffix[k]), (size >> 8 * k) & 0xFFu);
    }
}

static void set_bytes(pw_template_values *v, const char *name, uint64_t value, int bytes)
{
    for (int k = 0; k < bytes; k++)
        pw_template_set_number(v, pw_arena_print(v->arena, "%s_%d", name, k), (value >> 8 * k) & 0xFFu);
}

/* A negative word takes its sample complemented: flags where a sample turns. */
static void plan_avr_turns(pw_template_values *v, const int32_t b[3], const int32_t a[3])
{
    const bool minus[5] = {b[0] < 0, b[1] < 0, b[2] < 0, a[1] > 0, a[2] > 0};
    for (int i = 0; i < 5; i++) pw_template_set_number(v, pw_arena_print(v->arena, "%s_com", avr_word[i]), minus[i]);
    pw_template_set_number(v, "x1_turn", minus[0] != minus[1]);
    pw_template_set_number(v, "x2_turn", minus[1] != minus[2]);
    pw_template_set_number(v, "y2_turn", minus[3] != minus[4]);
}

/* What offsets and complements leave over, modulo 2^64: see the kernel. */
static uint64_t avr_constant(const facts *f, const int32_t b[3], const int32_t a[3])
{
    uint64_t sum = (uint64_t)f->half + (UINT64_C(1) << (31 + f->F));
    for (int i = 0; i < 5; i++) {
        int64_t word = i < 3 ? b[i] : -(int64_t)a[i - 2];
        if (word >= 0) sum -= (uint64_t)word << 31;
        else sum += (uint64_t)-word - ((uint64_t)-word << 31);
    }
    return sum;
}

static bool choose_avr_wide(const facts *given, pw_kernel *k)
{
    facts f = *given;
    int32_t b[3];
    fold_left(&f, b);
    if (f.q15 || f.left || f.right || f.F < 25 || f.F > 31) return false;
    *k = (pw_kernel){.file = "avr", .kernel = "wide", .values = k->values, .multiple = 1, .clamps = f.clips,
                     .why = "64-bit sum of products of bytes"};
    pw_template_values *v = &k->values;
    set_common(v, &f);
    plan_avr_words(v, b, f.w->a, 4);
    plan_avr_turns(v, b, f.w->a);
    uint64_t constant = avr_constant(&f, b, f.w->a);
    set_bytes(v, "d1", constant & UINT64_C(0xFF7F7F7F7F7FFFFF), 8);     /* what a column may start with */
    for (int i = 2; i < 7; i++)
        pw_template_set_number(v, pw_arena_print(v->arena, "d1_high_%d", i), constant >> (8 * i + 7) & 1u);
    pw_template_set_number(v, "up", 32 - f.F);
    pw_template_set_number(v, "limit", 1 << (f.F - 24));
    pw_template_set_number(v, "negative", 0x80 + (1 << (f.F - 25)));
    return true;
}

static bool choose_avr(const facts *f, pw_kernel *k)
{
    const int32_t *b = f->w->b, *a = f->w->a;
    if (!fits_32(f) || f->F < 9 || f->F > 15) return choose_avr_wide(f, k);
    *k = (pw_kernel){.file = "avr", .kernel = "narrow", .values = k->values, .multiple = 1, .clamps = f->clips,
                     .narrow = true, .why = "32-bit sum of products of bytes"};
    pw_template_values *v = &k->values;
    set_common(v, f);
    plan_avr_words(v, b, a, 2);
    int64_t late = f->half + (INT64_C(1) << (15 + f->F)) + 32768 * ((int64_t)a[1] + a[2]);
    int64_t early = f->right_half - 32768 * ((int64_t)b[0] + b[1] + b[2]);
    set_bytes(v, "d1", (uint64_t)(f->right ? early : early + late), 4);
    set_bytes(v, "d2", (uint64_t)-late, 4);
    pw_template_set_number(v, "right_bytes", f->right / 8);
    pw_template_set_number(v, "right_bits", f->right % 8);
    pw_template_set_number(v, "up", f->F >= 12 ? 16 - f->F : 0);
    pw_template_set_number(v, "down", f->F >= 12 ? 0 : f->F - 8);
    pw_template_set_number(v, "limit", 1 << (f->F - 8));
    pw_template_set_number(v, "negative", 0x80 + (1 << (f->F - 9)));
    return true;
}

static void plan_narrow(pw_kernel *k, const facts *f)
{
    uint32_t added = (uint32_t)(f->right_half + (f->half << f->right));
    set_bits(&k->values, "round", "round2", added);
    pw_template_set_number(&k->values, "round_low", added & 0xFFFFu);
    pw_template_set_number(&k->values, "round_high", added >> 16);
    pw_template_set_number(&k->values, "short", f->F < 16 ? 16 - f->F : 0);
}

static bool choose_narrow(const facts *f, const pw_target *target, pw_kernel *k)
{
    bool dual = target->has_dsp && !f->wrap && f->w->a[1] != -32768 && f->w->a[2] != -32768;
    *k = (pw_kernel){.file = dual ? "armv7e-m" : "armv7-m", .kernel = dual ? "dual" : "narrow", .values = k->values,
                     .multiple = dual ? 4 : 2, .clamps = f->clips, .narrow = true, .needs_form = dual && f->clips,
                     .why = dual ? "32-bit sum by dual 16-bit multiply-accumulate"
                                 : "32-bit sum by multiply-accumulate"};
    set_common(&k->values, f);
    plan_narrow(k, f);
    const int32_t *b = f->w->b, *a = f->w->a;
    if (dual) {
        const int32_t pair[3][2] = {{b[2], b[1]}, {-a[2], -a[1]}, {b[1], b[0]}};
        for (int i = 0; i < 3; i++)
            k->word[k->words++] = (int32_t)(((uint32_t)pair[i][0] & 0xFFFFu) | (uint32_t)pair[i][1] << 16);
    }
    if (!dual || f->clips) take_words(k, b, a);
    return true;
}

static void plan_any(pw_kernel *k, const facts *f)
{
    bool early = k->narrow || folds(f) || (!f->right && !f->left);
    pw_template_set_number(&k->values, "early", f->right_half + (early ? f->half << f->right : 0));
    pw_template_set_number(&k->values, "late", early ? 0 : f->half);
    bool low = f->F > 0 && (!f->q15 || largest(f) < ldexp(1.0, 31 + f->F));
    pw_template_set_number(&k->values, "low", low);
    pw_template_set_number(&k->values, "word", k->narrow || low);
    pw_template_set(&k->values, "signed", k->narrow ? "(int32_t)p" : "p");
}

bool pw_kernel_form(const pw_realisation *realisation, int section, pw_arena *arena, pw_kernel *out)
{
    if (!direct(realisation, section)) return false;
    facts f = facts_of(realisation, section);
    int32_t b[3];
    bool narrow = fits_32(&f);
    fold_left(&f, b);
    *out = (pw_kernel){.file = "any", .kernel = "direct", .values.arena = arena, .multiple = 2, .clamps = f.clips,
                       .narrow = narrow, .why = narrow ? "32-bit sum" : "64-bit sum"};
    set_common(&out->values, &f);
    pw_template_set_number(&out->values, "wide", !narrow);
    pw_template_set_number(&out->values, "hide", 0);
    plan_any(out, &f);
    take_words(out, b, f.w->a);
    return true;
}

bool pw_kernel_choose(const pw_realisation *realisation, int section, const pw_target *target, pw_arena *arena,
                      pw_kernel *out)
{
    if (!direct(realisation, section)) return false;
    facts f = facts_of(realisation, section);
    *out = (pw_kernel){.values.arena = arena};
    switch (target->instructions) {
    case PW_ARMV7_M:
    case PW_ARMV7E_M:
    case PW_ARMV8_1_M:
        if (fits_32(&f)) return choose_narrow(&f, target, out);
        if (target->has_vector && choose_vector(&f, out)) return true;
        if (choose_armv7(&f, out)) return true;
        break;
    case PW_ARMV6_M:
        if (choose_armv6(&f, out)) return true;
        break;
    case PW_AVR:
        if (choose_avr(&f, out)) return true;
        break;
    default: break;
    }
    if (!pw_kernel_form(realisation, section, arena, out)) return false;
    /* Inlined, its words would be seen, and multiplied by shifts and additions that cost more. */
    pw_template_set(&out->values, "attribute", "__attribute__((used, noinline)) ");
    pw_template_set_number(&out->values, "hide", target->instructions != PW_ANY && !out->narrow && f.clips);
    return true;
}

bool pw_kernel_same(const pw_kernel *a, const pw_kernel *b)
{
    if (strcmp(a->kernel, b->kernel) || a->values.rows != b->values.rows) return false;
    for (int i = 0; i < a->values.rows; i++)
        if (strcmp(a->values.row[i].name, b->values.row[i].name) || strcmp(a->values.row[i].text, b->values.row[i].text)) return false;
    return true;
}

pw_status pw_kernel_text(const pw_kernel *kernel, const char *name, const char *form, pw_text *out)
{
    pw_template_values values = kernel->values;
    pw_template_set(&values, "name", name);
    pw_template_set(&values, "form", form ? form : "");
    return pw_template_expand(kernel->file, kernel->kernel, &values, out);
}
