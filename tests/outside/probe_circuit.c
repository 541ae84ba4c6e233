/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Circuits on standard input, roots on standard output, for the Python tests.
 *
 * In:  R|C|L name a b value;  K name L1 L2 k;  U name plus minus out [gbw dcgain rout];
 *      E|G name s+ s- d+ d- value;  V|I node source-resistance;  O plus [minus];  Z load;  end
 * Out: one JSON object a line for each "end". Line numbers of messages count from the circuit's
 * first line. */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "analog/circuit.h"
#include "base/text.h"

static pw_part part[512];
static pw_circuit circuit;
static pw_arena arena;

static char *next(void)
{
    char *w = strtok(NULL, " \n");
    return w ? pw_arena_copy(&arena, w) : NULL;
}

static double number(double otherwise)
{
    char *w = next();
    return w ? strtod(w, NULL) : otherwise;
}

static void read_part(pw_part_kind kind, int nodes, int line)
{
    pw_part *p = &part[circuit.parts++];
    *p = (pw_part){.name = next(), .kind = kind, .at = {line, 1}, .value_at = {line, 9}};
    for (int i = 0; i < nodes; i++) {
        p->node[i] = next();
        p->node_at[i] = (pw_where){line, 2 + i};
    }
    if (kind != PW_OP_AMP) {
        p->value = number(NAN);
        return;
    }
    p->gain_bandwidth_hz = number(0);
    p->dc_gain = number(0);
    p->output_resistance = number(0);
    p->ideal = p->gain_bandwidth_hz == 0;
}

static void read_line(char *line, int at)
{
    switch (*strtok(line, " \n")) {
    case 'R': read_part(PW_RESISTOR, 2, at); break;
    case 'C': read_part(PW_CAPACITOR, 2, at); break;
    case 'L': read_part(PW_INDUCTOR, 2, at); break;
    case 'K': read_part(PW_COUPLING, 2, at); break;
    case 'U': read_part(PW_OP_AMP, 3, at); break;
    case 'E': read_part(PW_AMPLIFIER, 4, at); break;
    case 'G': read_part(PW_TRANSCONDUCTOR, 4, at); break;
    case 'V': case 'I':
        circuit.current_input = *line == 'I';
        circuit.input = next();
        circuit.source_resistance = number(*line == 'I' ? INFINITY : 0);
        circuit.input_at = (pw_where){at, 1};
        break;
    case 'O':
        circuit.output[0] = next();
        circuit.output[1] = next();
        circuit.output_at[0] = circuit.output_at[1] = (pw_where){at, 1};
        break;
    case 'Z': circuit.load = (pw_given){number(0), true, {at, 1}}; break;
    }
}

static void print_roots(const char *name, const double complex *root, int n)
{
    printf(", \"%s\": [", name);
    for (int i = 0; i < n; i++)
        printf("%s[%.17g, %.17g]", i ? ", " : "", creal(root[i]), cimag(root[i]));
    printf("]");
}

static void print_messages(pw_messages *messages)
{
    char *text = NULL;
    size_t size = 0;
    FILE *to = open_memstream(&text, &size);
    pw_messages_print(messages, to, false);
    fclose(to);
    printf(", \"messages\": [");
    for (char *line = strtok(text, "\n"), *first = line; line; line = strtok(NULL, "\n"))
        printf("%s\"%s\"", line == first ? "" : ", ", line);
    printf("]");
    free(text);
}

static void answer(void)
{
    pw_messages messages = {.file = "circuit"};
    pw_roots roots;
    circuit.part = part;
    circuit.at = (pw_where){0, 0};
    pw_status status = pw_analog_from_circuit(&circuit, &roots, &messages);
    printf("{\"status\": %d", status);
    if (!status) {
        print_roots("poles", roots.pole, roots.poles);
        print_roots("zeros", roots.zero, roots.zeros);
        printf(", \"factor\": %.17g", (double)roots.factor);
    }
    print_messages(&messages);
    printf("}\n");
    pw_messages_free(&messages);
    pw_arena_free(&arena);
    circuit = (pw_circuit){0};
}

int main(void)
{
    char line[512];
    for (int at = 1; fgets(line, sizeof line, stdin); at++) {
        if (*line == '\n') continue;
        if (strncmp(line, "end", 3)) {
            read_line(line, at);
            continue;
        }
        answer();
        at = 0;
    }
    return 0;
}
