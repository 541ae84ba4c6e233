/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The circuits of a stage in what `show --json` prints. */
#include "report/json_value.h"
#include "report/tolerance.h"

#include "analog/sensitivity.h"

static json_t *mode(const pw_mode *m)
{
    json_t *o = json_object();
    const double root[] = {creal(m->root), cimag(m->root)};
    pw_json_put(o, "kind", pw_json_text(m->zero ? "zero" : "pole"));
    pw_json_put(o, "roots", json_integer(m->count));
    pw_json_put(o, "root", pw_json_numbers(root, 2));
    pw_json_put(o, "f0_hz", pw_json_number(m->f0_hz));
    pw_json_put(o, "q", pw_json_number(m->q));
    pw_json_put(o, "time_constant_s", pw_json_number(m->tau_s));
    return o;
}

static json_t *gains(const double *gain)
{
    json_t *o = json_object();
    pw_json_put(o, "dc", pw_json_number(gain[PW_GAIN_DC]));
    pw_json_put(o, "middle", pw_json_number(gain[PW_GAIN_MIDDLE]));
    pw_json_put(o, "infinity", pw_json_number(gain[PW_GAIN_INFINITY]));
    return o;
}

static json_t *part(const pw_sensitivity *s, int row)
{
    const pw_part *p = &s->circuit->part[s->part[row]];
    json_t *o = json_object(), *f0 = json_array(), *q = json_array();
    for (int i = 0; i < s->modes; i++) {
        json_array_append_new(f0, pw_json_number(s->move[row * s->modes + i].f0));
        json_array_append_new(q, pw_json_number(s->move[row * s->modes + i].q));
    }
    pw_json_put(o, "name", pw_json_text(p->name));
    pw_json_put(o, "value", pw_json_number(p->kind == PW_OP_AMP ? p->gain_bandwidth_hz : p->value));
    pw_json_put(o, "tolerance", pw_json_number(p->tolerance));
    pw_json_put(o, "f0_percent_per_percent", f0);
    pw_json_put(o, "q_percent_per_percent", q);
    pw_json_put(o, "gain_db_per_percent", gains(s->gain_db[row]));
    return o;
}

static json_t *circuit(const pw_sensitivity *s)
{
    json_t *o = json_object(), *modes = json_array(), *parts = json_array();
    for (int i = 0; i < s->modes; i++) json_array_append_new(modes, mode(&s->mode[i]));
    for (int i = 0; i < s->parts; i++) json_array_append_new(parts, part(s, i));
    pw_json_put(o, "gain", gains(s->gain));
    pw_json_put(o, "middle_hz", pw_json_number(s->middle_hz));
    pw_json_put(o, "modes", modes);
    pw_json_put(o, "parts", parts);
    return o;
}

json_t *pw_json_circuits(const pw_stage *stage)
{
    pw_arena arena = {0};
    pw_messages unheard = {0};
    pw_circuit_list list;
    json_t *o = json_array();
    if (!pw_circuits_of(&stage->analog, &arena, &list, &unheard))
        for (int i = 0; i < list.count; i++) {
            pw_sensitivity *s = pw_arena_take(&arena, sizeof *s);
            if (!pw_sensitivity_compute(&list.circuit[i], &arena, s))
                json_array_append_new(o, circuit(s));
        }
    pw_messages_free(&unheard);
    pw_arena_free(&arena);
    return o;
}
