/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Roots: real ones, pairs as text, pairs as maps; and the gain that goes with them. */
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "stagefile/take.h"

/* ---- pairs as text: "-222 ± 333j krad/s" ---- */

static const char *const pair_signs[] = {"\u00b1", "+-", "+/-"};

/* Where the sign of a pair stands in the text, and its length; null where there is none. */
static const char *find_pair_sign(const char *text, size_t *length)
{
    for (size_t i = 0; i < sizeof pair_signs / sizeof pair_signs[0]; i++) {
        const char *at = strstr(text, pair_signs[i]);
        if (!at) continue;
        *length = strlen(pair_signs[i]);
        return at;
    }
    return NULL;
}

static bool is_j(char c) { return c == 'j' || c == 'i'; }

/* The imaginary number without its j: "333j krad/s", "j333" or "333 krad/s j" become a quantity;
 * *common: the text after "333j", which holds for the real part too. False where there is no j. */
static bool strip_j(const char *text, char *out, size_t room, const char **common)
{
    const char *p = pw_skip_blanks(text);
    *common = "";
    if (is_j(*p)) {
        snprintf(out, room, "%s", p + 1);
        return true;
    }
    const char *end = pw_decimal_end(p);
    if (end > p && is_j(*pw_skip_blanks(end))) {
        *common = pw_skip_blanks(end) + 1;
        snprintf(out, room, "%.*s %s", (int)(end - p), p, *common);
        return true;
    }
    size_t n = strlen(p);
    while (n && p[n - 1] == ' ') n--;
    if (!n || !is_j(p[n - 1])) return false;
    snprintf(out, room, "%.*s", (int)(n - 1), p);
    return true;
}

/* Both parts of a pair in rad/s. */
static bool read_pair(pw_reader *reader, const pw_key *key, const pw_tree *node, double *real,
                      double *imag)
{
    char left[128], right[128], number[160];
    size_t length = 0;
    const char *common, *sign = find_pair_sign(node->text, &length);
    pw_quantity_fault fault;
    bool fits = strlen(node->text) < sizeof left;
    if (fits) {
        snprintf(left, sizeof left, "%.*s", (int)(sign - node->text), node->text);
        snprintf(right, sizeof right, "%s", sign + length);
    }
    if (!fits || !strip_j(right, number, sizeof number, &common)) {
        pw_take_refuse(reader, key, node, "a pair without a j in its imaginary part");
        return false;
    }
    if (!pw_quantity_read(number, PW_DIM_ANGULAR, imag, &fault)) {
        pw_take_refuse(reader, key, node, fault.what);
        return false;
    }
    const char *start = pw_skip_blanks(left), *end = pw_decimal_end(start);
    *real = 0;
    if (!*start) return true;
    bool bare = end > start && !*pw_skip_blanks(end);
    snprintf(number, sizeof number, bare ? "%s %s" : "%s", left, common);
    if (pw_quantity_read(number, PW_DIM_ANGULAR, real, &fault)) return true;
    pw_take_refuse(reader, key, node, fault.what);
    return false;
}

static pw_root pair_of(double real, double imag, pw_where at)
{
    if (imag == 0) return (pw_root){.s = real, .s2 = real, .double_real = true, .at = at};
    return (pw_root){.s = CMPLX(real, fabs(imag)), .at = at};
}

/* ---- roots as maps ---- */

void pw_take_q(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    pw_root_form *form = base;
    pw_take_place(key, node, base, 0);
    if (node->kind != PW_TREE_SCALAR || strcmp(node->text, "infinite")) {
        pw_take_given(reader, key, node, base);
        return;
    }
    form->infinite = true;
    if (reader->poles)
        pw_error(reader->messages, node->at, "root.q: infinite puts a pole on the imaginary axis; "
                 "expected a quality such as 30 (infinite is for zeros)");
}

/* s^2 + (w/q) s + w^2 = 0 in the left half plane. Two real roots up to q = 1/2; the smaller one
 * comes from the product w^2, which loses no digits. */
static pw_root resonance(double w, double q, pw_where at)
{
    double d = 1 / (2 * q);
    if (d >= 1) {
        double large = w * (d + sqrt((d - 1) * (d + 1)));
        return (pw_root){.s = -large, .s2 = -w * (w / large), .double_real = true, .at = at};
    }
    return (pw_root){.s = CMPLX(-w * d, w * sqrt((1 - d) * (1 + d))), .at = at};
}

static void to_the_right(pw_root *root)
{
    root->s = CMPLX(fabs(creal(root->s)), cimag(root->s));
    root->s2 = fabs(root->s2);
}

static bool read_form(pw_reader *reader, const pw_tree *node, pw_root *root)
{
    pw_root_form form = {0};
    int before = reader->messages->errors;
    pw_take_map(reader, "root", node, &form);
    if (form.right && reader->poles)
        pw_error(reader->messages, form.right_at,
                 "root.right: a pole in the right half plane makes an "
                 "unstable stage; expected it for zeros only");
    if (reader->messages->errors > before) return false;
    if (form.real.given) {
        *root = form.imag.given ? pair_of(form.real.value, form.imag.value, node->at)
                                : (pw_root){.s = form.real.value, .at = node->at};
    } else if (form.infinite)
        *root = (pw_root){.s = CMPLX(0, form.frequency.value), .at = node->at};
    else {
        double q = form.q.given ? form.q.value : 1 / (2 * form.damping.value);
        *root = resonance(form.frequency.value, q, node->at);
    }
    if (form.right) to_the_right(root);
    return true;
}

/* ---- lists of roots ---- */

static bool looks_complex(const char *text)
{
    const char *p = pw_skip_blanks(text), *end = pw_decimal_end(p);
    const char *next = pw_skip_blanks(end);
    return end > p && (is_j(*next) || ((*next == '+' || *next == '-') && strpbrk(next, "ij")));
}

static bool read_root(pw_reader *reader, const pw_key *key, const pw_tree *node, pw_root *root)
{
    size_t length;
    double real, imag;
    if (node->kind == PW_TREE_MAP) return read_form(reader, node, root);
    if (node->kind == PW_TREE_SCALAR && find_pair_sign(node->text, &length)) {
        if (!read_pair(reader, key, node, &real, &imag)) return false;
        *root = pair_of(real, imag, node->at);
        return true;
    }
    if (node->kind == PW_TREE_SCALAR && looks_complex(node->text)) {
        pw_take_refuse(reader, key, node, "a complex root without its conjugate");
        return false;
    }
    if (!pw_take_value(reader, key, node, &real)) return false;
    *root = (pw_root){.s = real, .at = node->at};
    return true;
}

void pw_take_root_list(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    pw_analog_spec *spec = base;
    int n = 0;
    reader->poles = !strcmp(key->name, "poles");
    if (!pw_take_is_list(reader, key, node)) return;
    const pw_key item = pw_key_item(key);
    pw_root *list = pw_arena_take(reader->arena, (size_t)(node->count + 1) * sizeof *list);
    for (int i = 0; i < node->count; i++) n += read_root(reader, &item, node->item[i], &list[n]);
    *(reader->poles ? &spec->pole : &spec->zero) = list;
    *(reader->poles ? &spec->poles : &spec->zeros) = n;
}

/* ---- the gain ---- */

void pw_take_gain(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    pw_gain *gain = &((pw_analog_spec *)base)->gain;
    pw_gain_form form = {0};
    gain->at = node->at;
    if (node->kind != PW_TREE_MAP) {
        pw_take_refuse(reader, key, node, NULL);
        return;
    }
    pw_take_map(reader, "gain", node, &form);
    gain->kind = form.factor.given ? PW_GAIN_FACTOR : PW_GAIN_AT;
    gain->factor = form.factor.value;
    gain->at_hz = form.at.value;
    gain->is = form.is.value;
    gain->invert = form.invert;
}
