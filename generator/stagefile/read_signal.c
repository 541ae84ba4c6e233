/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Converters: volts to samples, and what the values of one side have to do with each other. */
#include <math.h>
#include <string.h>

#include "stagefile/take.h"

/* Where the value of a key stands; where the map does, if it is not there. */
static pw_where place_of(const pw_tree *map, const char *name)
{
    const pw_tree *value = pw_tree_find(map, name);
    return value ? value->at : map->at;
}

static void check_rails(pw_reader *reader, const pw_tree *node, const pw_port *port)
{
    pw_where at = place_of(node, "rails");
    if (!port->has_rails) return;
    if (port->rail[1] <= port->low || port->rail[0] >= port->high)
        pw_error(reader->messages, at,
                 "signal.output.rails: %g to %g lies outside low to high, %g to %g; "
                 "expected rails within the span",
                 port->rail[0], port->rail[1], port->low, port->high);
    else if (port->rail[0] > port->zero || port->rail[1] < port->zero)
        pw_error(reader->messages, at,
                 "signal.output.rails: zero, %g, is not between the rails, %g and %g; "
                 "expected rails around it",
                 port->zero, port->rail[0], port->rail[1]);
}

static void check_port(pw_reader *reader, const char *side, const pw_tree *node, pw_port *port)
{
    if (!(port->low < port->high)) {
        pw_error(reader->messages, place_of(node, "high"),
                 "%s.high: %g is not above low, %g; expected a span "
                 "such as {low: 0 V, high: 3.3 V}",
                 side, port->high, port->low);
        return;
    }
    if (port->zero < port->low || port->zero > port->high) {
        pw_error(reader->messages, place_of(node, "zero"),
                 "%s.zero: %g is not within low to high, %g to %g; "
                 "expected the bias between them",
                 side, port->zero, port->low, port->high);
        return;
    }
    port->full_scale = fmax(port->high - port->zero, port->zero - port->low);
    if (port->peak == 0) port->peak = port->full_scale;
    if (port->peak > port->full_scale)
        pw_error(reader->messages, place_of(node, "peak"),
                 "%s.peak: %g is above full scale, %g; expected less, "
                 "or a wider span",
                 side, port->peak, port->full_scale);
    check_rails(reader, node, port);
}

void pw_port_default(pw_port *port)
{
    *port = (pw_port){.low = -1, .high = 1, .peak = 1, .full_scale = 1};
}

void pw_take_port(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    pw_port *port = (pw_port *)((char *)base + key->offset);
    int before = reader->messages->errors;
    if (node->kind != PW_TREE_MAP) {
        pw_take_refuse(reader, key, node, NULL);
        return;
    }
    *port = (pw_port){.given = true, .full_scale = 1, .at = node->at};
    pw_take_map(reader, key->sub, node, port);
    if (reader->messages->errors == before) check_port(reader, key->sub, node, port);
}

void pw_take_rails(pw_reader *reader, const pw_key *key, const pw_tree *node, void *base)
{
    int before = reader->messages->errors;
    pw_take_pair(reader, key, node, base);
    ((pw_port *)base)->has_rails = reader->messages->errors == before;
}
