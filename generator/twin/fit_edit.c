/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The fitted values into the text of the stage file: each scalar is replaced where it stands; every
 * other byte, comments and layout too, stays. */
#include <ctype.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/files.h"
#include "stagefile/quantity.h"
#include "stagefile/read.h"
#include "stagefile/tree.h"
#include "twin/fit.h"

typedef struct change { size_t at, length; const char *text; } change;

typedef struct editing {
    const pw_text *text;
    pw_arena arena;
    change list[2 * PW_MOST_FITTED];
    int count;
} editing;

/* ---- Where a scalar stands ---- */

/* The byte of a line and a column, which counts characters. */
static size_t byte_of(const pw_text *text, pw_where at)
{
    const char *p = pw_text_string(text), *end = p + text->size;
    for (int line = 1; line < at.line && p < end; p++) line += *p == '\n';
    for (int column = 1; column < at.column && p < end; column++)
        do p++; while (p < end && ((unsigned char)*p & 0xC0) == 0x80);
    return (size_t)(p - pw_text_string(text));
}

/* The bytes that the scalar takes in the text; 0 where it is not plainly there (a block, an
 * alias). */
static size_t length_of(const pw_text *text, size_t at, const pw_tree *node)
{
    const char *p = pw_text_string(text) + at;
    size_t n = strlen(node->text);
    if (!strncmp(p, node->text, n)) return n;
    if ((*p == '"' || *p == '\'') && !strncmp(p + 1, node->text, n) && p[n + 1] == *p) return n + 2;
    return 0;
}

static pw_status replace(editing *e, const pw_tree *node, const char *with, const char *name)
{
    size_t at = byte_of(e->text, node->at), length = length_of(e->text, at, node);
    if (!length) {
        fprintf(stderr,
                "polewright: --calibrate: the value of %s at line %d is not written out in one "
                "place; expected a plain "
                "value there\n",
                name, node->at.line);
        return PW_WRONG;
    }
    e->list[e->count++] = (change){at, length, with};
    return PW_OK;
}

/* The node of a path such as analog.cascade.2.roots.poles.1, or null. */
static const pw_tree *walk(const pw_tree *node, const char *path)
{
    char name[64];
    while (node && *path) {
        size_t n = strcspn(path, ".");
        snprintf(name, sizeof name, "%.*s", (int)n, path);
        if (node->kind == PW_TREE_LIST) {
            int i = atoi(name);
            node = i >= 1 && i <= node->count ? node->item[i - 1] : NULL;
        } else node = node->kind == PW_TREE_MAP ? pw_tree_find(node, name) : NULL;
        path += n + (path[n] == '.');
    }
    return node;
}

/* ---- New text for an old one ---- */

/* A code such as 4k7 or R47 has a digit behind its letter: its letter, else null. */
static const char *code_letter(const char *text)
{
    const char *p = text + strspn(text, "0123456789");
    const char *next = *p ? p + 1 : p;
    while (((unsigned char)*next & 0xC0) == 0x80) next++;
    bool letter = isalpha((unsigned char)*p) || ((unsigned char)*p & 0x80);
    return letter && *p != 'e' && *p != 'E' && isdigit((unsigned char)*next) ? p : NULL;
}

static const char *scaled_code(editing *e, const char *text, const char *letter, double ratio)
{
    char number[64];
    size_t wide = 1;
    while (((unsigned char)letter[wide] & 0xC0) == 0x80) wide++;
    snprintf(number, sizeof number, "%.*s.%s", (int)(letter - text), text, letter + wide);
    double value = strtod(number, NULL) * ratio;
    if (*letter == 'R') return pw_arena_print(&e->arena, "%.9g", value);
    return pw_arena_print(&e->arena, "%.9g%.*s", value, (int)wide, letter);
}

/* The quantity times ratio, in the unit that it has; in dB as many more. */
static const char *scaled(editing *e, const char *text, double ratio)
{
    const char *letter = code_letter(text), *begin = pw_skip_blanks(text),
               *end = pw_decimal_end(begin);
    if (letter) return scaled_code(e, text, letter, ratio);
    double value = strtod(begin, NULL);
    if (strstr(end, "dB")) value += 20 * log10(ratio);
    else value *= ratio;
    return pw_arena_print(&e->arena, "%.9g%s", value, end);
}

static pw_status scale_node(editing *e, const pw_tree *node, double ratio, const char *name)
{
    if (node && node->kind == PW_TREE_MAP) node = pw_tree_find(node, "value");
    if (node && node->kind == PW_TREE_SCALAR)
        return replace(e, node, scaled(e, node->text, ratio), name);
    fprintf(stderr, "polewright: --calibrate: the value of %s is not found in the stage file\n",
            name);
    return PW_FAILED;
}

/* ---- Roots ---- */

static pw_status put_number(editing *e, const pw_tree *map, const char *key, double value,
                            const char *name)
{
    const pw_tree *node = pw_tree_find(map, key);
    return node ? replace(e, node, pw_arena_print(&e->arena, "%.9g", value), name) : PW_OK;
}

static pw_status edit_root(editing *e, const pw_tree *node, const pw_fitted *p)
{
    const pw_root *r = p->root;
    double ratio = p->value / p->nominal;
    bool q = p->kind == PW_FITTED_Q;
    if (node && node->kind == PW_TREE_MAP && pw_tree_find(node, "frequency")) {
        const char *key = !q ? "frequency" : pw_tree_find(node, "q") ? "q" : "damping";
        return scale_node(e, pw_tree_find(node, key), q && key[0] == 'd' ? 1 / ratio : ratio,
                          p->name);
    }
    if (q) return PW_OK;         /* written with its frequency */
    if (node && node->kind == PW_TREE_MAP) {
        pw_status status = put_number(e, node, "real", creal(r->s), p->name);
        return status ? status : put_number(e, node, "imag", cimag(r->s), p->name);
    }
    if (node && !r->double_real && cimag(r->s) != 0)
        return replace(e, node,
                       pw_arena_print(&e->arena, "%.9g \u00b1 %.9gj", creal(r->s), cimag(r->s)),
                       p->name);
    if (r->double_real) {
        fprintf(stderr,
                "polewright: --calibrate: %s: the pair has become two real roots; expected it as "
                "{frequency: .., q: ..}\n",
                p->name);
        return PW_WRONG;
    }
    return scale_node(e, node, ratio, p->name);
}

/* ---- The whole ---- */

static int by_place(const void *left, const void *right)
{
    const change *l = left, *r = right;
    return l->at < r->at ? -1 : l->at > r->at;
}

static void apply(editing *e, pw_text *out)
{
    const char *text = pw_text_string(e->text);
    size_t at = 0;
    qsort(e->list, (size_t)e->count, sizeof *e->list, by_place);
    for (int i = 0; i < e->count; i++) {
        pw_text_add_bytes(out, text + at, e->list[i].at - at);
        pw_text_add(out, e->list[i].text);
        at = e->list[i].at + e->list[i].length;
    }
    pw_text_add_bytes(out, text + at, e->text->size - at);
}

static pw_status edit_all(editing *e, const pw_tree *root, const pw_fit *fit)
{
    pw_status status = PW_OK;
    for (int i = 0; i < fit->count && !status; i++) {
        const pw_fitted *p = &fit->parameter[i];
        const pw_tree *node = walk(root, p->path);
        if (p->held > 0.999999) continue;
        status =
            p->root ? edit_root(e, node, p) : scale_node(e, node, p->value / p->nominal, p->name);
    }
    return status;
}

pw_status pw_fit_model(const char *stage_path, const pw_text *text, pw_roots *out)
{
    pw_messages messages = {.file = stage_path};
    pw_stage stage;
    pw_status status = pw_stage_read(text, NULL, 0, &stage, &messages);
    if (!status) status = pw_analog_build(&stage.analog, out, &messages);
    if (status) {
        pw_messages_print(&messages, stderr, true);
        fprintf(stderr, "polewright: --calibrate: the fitted values do not make a stage file\n");
        status = PW_FAILED;
    }
    pw_messages_free(&messages);
    pw_stage_free(&stage);
    return status;
}

pw_status pw_fit_edit(const char *stage_path, const pw_fit *fit, pw_text *out)
{
    pw_text text = {0};
    pw_tree *root = NULL;
    pw_messages messages = {.file = stage_path};
    editing *e = pw_take(sizeof *e);
    *e = (editing){.text = &text};
    pw_status status = pw_file_read(stage_path, PW_TREE_MOST_BYTES, &text);
    if (!status)
        status = pw_tree_parse(pw_text_string(&text), text.size, (pw_where){0, 0}, &e->arena, &root,
                               &messages);
    if (!status) status = edit_all(e, root, fit);
    if (!status) apply(e, out);
    pw_messages_free(&messages);
    pw_arena_free(&e->arena);
    pw_text_free(&text);
    free(e);
    return status;
}
