/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Cells around one op-amp: amplifiers, integrators, compensators, equalisers. */
#include "analog/cell.h"

#define ROWS(table) ((int)(sizeof(table) / sizeof((table)[0])))

const pw_cell_kind pw_cells_amplifier[] = {
    {.name = "inverting",
     .about = "Inverting amplifier with a pole",
     .net = "R1 in m; R2 m out; C1?open m out; U1 ground m out",
     .formula = "-(R2 / R1) / (1 + s R2 C1)",
     .source = "Franco, ch. 3 (low-pass with gain)",
     .diagram = "             +--C1--+\n"
                "             +--R2--+\n"
                "in --R1--m---+-[-]--+-- out\n"
                "         ground-[+]\n"},
    {.name = "non-inverting",
     .about = "Non-inverting amplifier behind an RC pole",
     .net = "R1 in p; C1 p ground; R2?open m ground; R3?short m out; C2?open m out; U1 p m out",
     .formula = "(1 + (R3/R2) / (1 + s R3 C2)) / (1 + s R1 C1)",
     .source = "Franco, ch. 1 and 3",
     .diagram = "in --R1--+---[+]--+-- out\n"
                "         C1 +-[-]  |\n"
                "     ground +--R3--+   (C2 across R3)\n"
                "            R2\n"
                "          ground\n"},
    {.name = "integrator",
     .about = "Inverting integrator; R2 makes it lossy",
     .net = "R1 in m; C1 m out; R2?open m out; U1 ground m out",
     .formula = "-1 / (s R1 C1)",
     .source = "Franco, ch. 3; Horowitz and Hill, 4.2",
     .diagram = "             +--C1--+   (R2 across C1)\n"
                "in --R1--m---+-[-]--+-- out\n"
                "         ground-[+]\n"},
    {.name = "integrator-lead-zero",
     .about = "Integrator with a lead zero (proportional-integral)",
     .net = "R1 in m; R2 m x; C1 x out; U1 ground m out",
     .formula = "-(1 + s R2 C1) / (s R1 C1)",
     .source = "Ogata, ch. 3 (table of op-amp controllers)",
     .diagram = "             +--R2--C1--+\n"
                "in --R1--m---+---[-]----+-- out\n"
                "          ground-[+]\n"},
    {.name = "compensator-type-1",
     .about = "Type I error amplifier: an integrator",
     .net = "R1 in m; C1 m out; U1 ground m out",
     .formula = "-1 / (s R1 C1)",
     .source = "Franco, ch. 11",
     .diagram = "             +--C1--+\n"
                "in --R1--m---+-[-]--+-- out\n"
                "         ground-[+]\n"},
    {.name = "compensator-type-2",
     .about = "Type II error amplifier: integrator, zero and pole",
     .net = "R1 in m; R2 m x; C1 x out; C2 m out; U1 ground m out",
     .formula = "-(1 + s R2 C1) / (s R1 (C1 + C2) (1 + s R2 C1 C2 / (C1 + C2)))",
     .source = "Franco, ch. 11; Venable, The k-factor, 1983",
     .diagram = "             +----C2----+\n"
                "             +--R2--C1--+\n"
                "in --R1--m---+---[-]----+-- out\n"
                "          ground-[+]\n"},
    {.name = "compensator-type-3",
     .about = "Type III error amplifier: integrator, two zeros, two poles",
     .net = "R1 in m; R2 in y; C1 y m; R3 m x; C2 x out; C3 m out; U1 ground m out",
     .formula = "-(1 + s (R1 + R2) C1) (1 + s R3 C2) / (s R1 (C2 + C3) (1 + s R2 C1) (1 + s R3 C2 "
                "C3 / (C2 + C3)))",
     .source = "Franco, ch. 11; Venable, The k-factor, 1983",
     .diagram = "    +--R2--C1--+ +----C3----+\n"
                "    |          | +--R3--C2--+\n"
                "in -+----R1----+-+---[-]----+-- out\n"
                "              ground-[+]\n"},
    {.name = "differentiator",
     .about = "Inverting differentiator with a pole",
     .net = "R1 in a; C1 a m; R2 m out; C2?open m out; U1 ground m out",
     .formula = "-s R2 C1 / ((1 + s R1 C1) (1 + s R2 C2))",
     .source = "Franco, ch. 3; Horowitz and Hill, 4.2",
     .diagram = "                 +--R2--+   (C2 across R2)\n"
                "in --R1--C1--m---+-[-]--+-- out\n"
                "             ground-[+]\n"},
    {.name = "charge-amplifier",
     .about = "Charge amplifier: a sensor of capacitance C1, feedback C2, R2",
     .net = "C1 in a; R1?short a m; C2 m out; R2 m out; U1 ground m out",
     .formula = "-s C1 R2 / ((1 + s R1 C1) (1 + s R2 C2)); mid-band -C1 / C2",
     .source = "Horowitz and Hill, 4.3 and 8.11 (charge amplifier); nodal analysis (formula)",
     .diagram = "                 +--C2--+\n"
                "                 +--R2--+\n"
                "in --C1--R1--m---+-[-]--+-- out\n"
                "             ground-[+]\n"},
    {.name = "transimpedance",
     .about = "Transimpedance amplifier (current in, ohms out)",
     .net = "R1 in out; C1 in out; U1 ground in out",
     .current = true,
     .formula = "-R1 / (1 + s R1 C1)",
     .source = "Horowitz and Hill, 8.11; Franco, ch. 2",
     .diagram = "          +--C1--+\n"
                "          +--R1--+\n"
                "in (I) ---+-[-]--+-- out\n"
                "      ground-[+]\n"},
    {.name = "shelving-low",
     .about = "Low shelf: more gain below than above",
     .net = "R1 in m; R2 m x; R3 x out; C1 x out; U1 ground m out",
     .formula = "-((R2 + R3) / R1) (1 + s (R2 || R3) C1) / (1 + s R3 C1)",
     .source = "Self, Small Signal Audio Design (form); nodal analysis (formula)",
     .diagram = "                  +--C1--+\n"
                "             +-R2-+--R3--+\n"
                "in --R1--m---+----[-]----+-- out\n"
                "           ground-[+]\n"},
    {.name = "shelving-high",
     .about = "High shelf: more gain above than below",
     .net = "R1 in m; R2 in y; C1 y m; R3 m out; U1 ground m out",
     .formula = "-(R3 / R1) (1 + s (R1 + R2) C1) / (1 + s R2 C1)",
     .source = "Self, Small Signal Audio Design (form); nodal analysis (formula)",
     .diagram = "    +--R2--C1--+ +--R3--+\n"
                "in -+----R1----+-+-[-]--+-- out\n"
                "             ground-[+]\n"},
    {.name = "phono-equaliser",
     .about = "Phono equaliser (IEC 60098) in the feedback of one op-amp",
     .net = "R1 m a; C1?short a ground; R2 m b; C2 m b; R3 b out; C3 b out; U1 in m out",
     .formula = "1 + (R2/(1 + s R2 C2) + R3/(1 + s R3 C3)) s C1 / (1 + s R1 C1)",
     .source = "Franco, ch. 3 (example 3.6)",
     .diagram = "in ---------[+]------------+-- out\n"
                "        +---[-]            |\n"
                "        +--R2||C2--R3||C3--+\n"
                "        R1\n"
                "        C1\n"
                "      ground\n"},
};
const int pw_cells_amplifier_count = ROWS(pw_cells_amplifier);
