/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What `show` adds for circuits. */
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "analog/sensitivity.h"

#define MODES_A_TABLE 3          /* so that a row fits 80 columns */
#define MOST_MODES 9             /* in tables for people */

static const char *unit_of(pw_part_kind kind)
{
    switch (kind) {
    case PW_RESISTOR: return "ohm";
    case PW_CAPACITOR: return "F";
    case PW_INDUCTOR: return "H";
    case PW_TRANSCONDUCTOR: return "S";
    case PW_OP_AMP: return "Hz";
    case PW_AMPLIFIER: case PW_COUPLING: return "";
    }
    return "";
}

static double value_of(const pw_part *part)
{
    return part->kind == PW_OP_AMP ? part->gain_bandwidth_hz : part->value;
}

/* pw_si without the prefix's blank where there is no unit. */
static const char *amount(char *buffer, double value, const char *unit)
{
    pw_si(buffer, value, unit, 4);
    size_t n = strlen(buffer);
    if (n && buffer[n - 1] == ' ') buffer[n - 1] = 0;
    return buffer;
}

/* ---- Gains ---- */

/* So that a small negative value does not print as -0. */
static double decibels(double gain)
{
    double db = 20 * log10(fabs(gain));
    return fabs(db) < 0.0005 ? 0 : db;
}

static void put_gain(const char *where, double gain, pw_text *out)
{
    if (isinf(gain)) pw_text_print(out, "%s without end", where);
    else if (gain == 0) pw_text_print(out, "%s 0", where);
    else pw_text_print(out, "%s %.5g (%.3f dB)", where, gain, decibels(gain));
}

static void put_gains(const pw_sensitivity *s, pw_text *out)
{
    char hz[PW_NUMBER_ROOM];
    bool integrates = isinf(s->gain[PW_GAIN_DC]);
    pw_text_add(out, "  gain: ");
    put_gain("DC", s->gain[PW_GAIN_DC], out);
    if (s->middle_hz > 0) {
        put_gain(integrates ? "; mid-band" : "; largest", s->gain[PW_GAIN_MIDDLE], out);
        pw_text_print(out, " at %s", pw_si(hz, s->middle_hz, "Hz", 4));
    } else pw_text_add(out, ", the largest");
    put_gain("; infinity", s->gain[PW_GAIN_INFINITY], out);
    pw_text_add(out, "\n");
}

/* ---- The table ---- */

static void put_move(double x, pw_text *out)
{
    if (isnan(x)) pw_text_print(out, " %8s", "-");
    else pw_text_print(out, " %+8.3f", fabs(x) < 0.0005 ? 0.0 : x);
}

/* The modes of the tables, in order: all, or the slowest of many. */
static int choose_modes(const pw_sensitivity *s, int *chosen)
{
    int n = 0, poles = 0, zeros = 0;
    for (int i = 0; i < s->modes; i++) {
        bool wanted =
            s->modes <= MOST_MODES
            || (s->mode[i].zero ? zeros++ < MOST_MODES / 3 : poles++ < MOST_MODES / 3 * 2);
        if (wanted) chosen[n++] = i;
    }
    return n;
}

static void put_heads(const pw_sensitivity *s, const int *mode, int modes, pw_text *out)
{
    char hz[PW_NUMBER_ROOM], head[64];
    pw_text_print(out, "  %-19s", "");
    for (int i = 0; i < modes; i++) {
        const pw_mode *m = &s->mode[mode[i]];
        snprintf(head, sizeof head, "%s %s", m->zero ? "zero" : "pole",
                 pw_si(hz, m->f0_hz, "Hz", 4));
        pw_text_print(out, " %17s", head);
    }
    if (!modes) pw_text_print(out, " %26s", "gain, dB");
    pw_text_print(out, "\n  %-6s %12s", "part", "value");
    for (int i = 0; i < modes; i++)
        pw_text_print(out, " %8s %8s", "f0", s->mode[mode[i]].count == 2 ? "Q" : "");
    if (!modes)
        pw_text_print(out, " %8s %8s %8s", "DC", isinf(s->gain[0]) ? "mid" : "largest", "infinity");
    pw_text_add(out, "\n");
}

/* Of these modes, or, with none, of the gains. */
static void put_rows(const pw_sensitivity *s, const int *mode, int modes, pw_text *out)
{
    char value[PW_NUMBER_ROOM];
    put_heads(s, mode, modes, out);
    for (int row = 0; row < s->parts; row++) {
        const pw_part *part = &s->circuit->part[s->part[row]];
        pw_text_print(out, "  %-6s %12s", part->name,
                      amount(value, value_of(part), unit_of(part->kind)));
        for (int i = 0; i < modes; i++) {
            const pw_moves *m = &s->move[row * s->modes + mode[i]];
            put_move(m->f0, out);
            if (s->mode[mode[i]].count == 2) put_move(m->q, out);
            else pw_text_print(out, " %8s", "");
        }
        for (int k = 0; k < PW_GAIN_PLACES && !modes; k++) put_move(s->gain_db[row][k], out);
        pw_text_add(out, "\n");
    }
}

static void put_table(const pw_sensitivity *s, pw_text *out)
{
    int chosen[2 * PW_MAX_ROOTS], n = choose_modes(s, chosen);
    pw_text_add(out,
                "  sensitivity to each part: percent per percent; of the gain: dB per percent\n");
    for (int first = 0; first < n; first += MODES_A_TABLE) {
        put_rows(s, chosen + first, n - first < MODES_A_TABLE ? n - first : MODES_A_TABLE, out);
        pw_text_add(out, "\n");
    }
    put_rows(s, NULL, 0, out);
    if (n < s->modes)
        pw_text_print(out, "  and %d faster poles and zeros (--json lists all)\n", s->modes - n);
}

/* ---- The nearest values of a series ---- */

static void put_changes(const pw_circuit *circuit, const pw_circuit *rounded, pw_text *out)
{
    char before[PW_NUMBER_ROOM], after[PW_NUMBER_ROOM];
    for (int i = 0; i < circuit->parts; i++) {
        const pw_part *part = &circuit->part[i], *now = &rounded->part[i];
        if (now->value == part->value) continue;
        pw_text_print(out, "    %-6s %12s -> %s (%+.2f %%)\n", part->name,
                      amount(before, part->value, unit_of(part->kind)),
                      amount(after, now->value, unit_of(part->kind)),
                      (now->value / part->value - 1) * 100);
    }
}

static void put_effect(const pw_sensitivity *before, const pw_sensitivity *after, pw_text *out)
{
    char hz[2][PW_NUMBER_ROOM];
    for (int i = 0; i < before->modes && i < after->modes; i++) {
        const pw_mode *b = &before->mode[i], *a = &after->mode[i];
        if (b->zero != a->zero || b->count != a->count) continue;
        pw_text_print(out, "    %s %s -> %s (%+.2f %%)", b->zero ? "zero" : "pole",
                      pw_si(hz[0], b->f0_hz, "Hz", 4), pw_si(hz[1], a->f0_hz, "Hz", 4),
                      (a->f0_hz / b->f0_hz - 1) * 100);
        if (b->count == 2 && isfinite(b->q)) pw_text_print(out, ", Q %.4g -> %.4g", b->q, a->q);
        pw_text_add(out, "\n");
    }
    double b = before->gain[PW_GAIN_MIDDLE], a = after->gain[PW_GAIN_MIDDLE];
    pw_text_print(out, "    gain %.3f dB -> %.3f dB\n", 20 * log10(b), 20 * log10(a));
}

static void put_nearest(const pw_sensitivity *s, pw_arena *arena, pw_text *out)
{
    const pw_circuit *circuit = s->circuit;
    pw_circuit rounded = *circuit;
    bool changed = false;
    rounded.part = pw_arena_take(arena, (size_t)(circuit->parts + 1) * sizeof *rounded.part);
    for (int i = 0; i < circuit->parts; i++) {
        pw_part *part = &rounded.part[i];
        *part = circuit->part[i];
        if (part->kind == PW_RESISTOR || part->kind == PW_CAPACITOR || part->kind == PW_INDUCTOR)
            part->value = pw_series_nearest(circuit->series, part->value);
        changed |= part->value != circuit->part[i].value;
    }
    pw_text_print(out, "  nearest values of %s (IEC 60063):%s\n", circuit->series,
                  changed ? "" : " all are");
    put_changes(circuit, &rounded, out);
    pw_sensitivity *after = pw_arena_take(arena, sizeof *after);
    if (changed && !pw_sensitivity_compute(&rounded, arena, after)) put_effect(s, after, out);
}

/* Columns end in blanks where a cell is empty; lines do not. */
static void add_trimmed(const pw_text *text, pw_text *out)
{
    for (const char *line = pw_text_string(text), *end; *line; line = end + 1) {
        end = strchr(line, '\n');
        size_t n = (size_t)(end - line);
        while (n && line[n - 1] == ' ') n--;
        pw_text_add_bytes(out, line, n);
        pw_text_add(out, "\n");
    }
}

static void show_one(const pw_circuit *circuit, int number, int of, pw_text *out)
{
    pw_arena arena = {0};
    pw_text text = {0};
    pw_sensitivity *s = pw_arena_take(&arena, sizeof *s);
    if (!pw_sensitivity_compute(circuit, &arena, s)) {
        if (of > 1) pw_text_print(&text, "Circuit %d of %d\n", number, of);
        else pw_text_add(&text, "Circuit\n");
        put_gains(s, &text);
        if (s->parts) put_table(s, &text);
        if (circuit->series) put_nearest(s, &arena, &text);
    }
    add_trimmed(&text, out);
    pw_text_free(&text);
    pw_arena_free(&arena);
}

void pw_circuit_show(const pw_stage *stage, pw_text *out)
{
    pw_arena arena = {0};
    pw_messages unheard = {0};
    pw_circuit_list list;
    if (!pw_circuits_of(&stage->analog, &arena, &list, &unheard))
        for (int i = 0; i < list.count; i++) show_one(&list.circuit[i], i + 1, list.count, out);
    pw_messages_free(&unheard);
    pw_arena_free(&arena);
}
