/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Cells of resistors, capacitors and inductors alone. */
#include "analog/cell.h"

#define ROWS(table) ((int)(sizeof(table) / sizeof((table)[0])))

const pw_cell_kind pw_cells_passive[] = {
    {.name = "rc-lowpass",
     .about = "First-order low-pass",
     .net = "R1 in out; C1 out ground",
     .formula = "1 / (1 + s R1 C1)",
     .source = "Horowitz and Hill, The Art of Electronics, 3rd ed., 1.7",
     .diagram = "in --R1--+-- out\n"
                "         C1\n"
                "       ground\n"},
    {.name = "rc-highpass",
     .about = "First-order high-pass",
     .net = "C1 in out; R1 out ground",
     .formula = "s R1 C1 / (1 + s R1 C1)",
     .source = "Horowitz and Hill, 1.7",
     .diagram = "in --C1--+-- out\n"
                "         R1\n"
                "       ground\n"},
    {.name = "rl-lowpass",
     .about = "First-order low-pass with a coil",
     .net = "L1 in out; R1 out ground",
     .formula = "1 / (1 + s L1 / R1)",
     .source = "Horowitz and Hill, 1.7",
     .diagram = "in --L1--+-- out\n"
                "         R1\n"
                "       ground\n"},
    {.name = "rl-highpass",
     .about = "First-order high-pass with a coil",
     .net = "R1 in out; L1 out ground",
     .formula = "(s L1 / R1) / (1 + s L1 / R1)",
     .source = "Horowitz and Hill, 1.7",
     .diagram = "in --R1--+-- out\n"
                "         L1\n"
                "       ground\n"},
    {.name = "lead",
     .about = "Phase lead: a zero below a pole",
     .net = "R1 in out; C1 in out; R2 out ground",
     .formula = "(R2 / (R1 + R2)) (1 + s R1 C1) / (1 + s (R1 || R2) C1)",
     .source = "Ogata, Modern Control Engineering, ch. 6",
     .diagram = "    +--R1--+\n"
                "in -+      +--+-- out\n"
                "    +--C1--+  R2\n"
                "            ground\n"},
    {.name = "lag",
     .about = "Phase lag: a pole below a zero",
     .net = "R1 in out; R2 out a; C1 a ground",
     .formula = "(1 + s R2 C1) / (1 + s (R1 + R2) C1)",
     .source = "Ogata, ch. 6",
     .diagram = "in --R1--+-- out\n"
                "         R2\n"
                "         C1\n"
                "       ground\n"},
    {.name = "twin-t",
     .about = "Twin-T notch, passive",
     .net = "R1 in a; R2 a out; C1 in b; C2 b out; R3 b ground; C3 a ground",
     .formula = "R1 = R2 = R, R3 = R/2, C1 = C2 = C, C3 = 2C: (1 + (s/w0)^2) / (1 + 4 s/w0 + "
                "(s/w0)^2), w0 = 1/(R C)",
     .source = "Franco, Design with Operational Amplifiers, 3rd ed., ch. 4",
     .diagram = "    +--R1--+--R2--+\n"
                "    |      C3     |\n"
                "    |    ground   |\n"
                "in -+             +-- out\n"
                "    +--C1--+--C2--+\n"
                "           R3\n"
                "         ground\n"},
    {.name = "bridged-t",
     .about = "Bridged T: a shallow notch",
     .net = "C1 in a; C2 a out; R1 a ground; R2 in out",
     .formula = "(1 + s R1 (C1 + C2) + s^2 R1 R2 C1 C2) / (1 + s (R1 (C1 + C2) + R2 C2) + s^2 R1 "
                "R2 C1 C2)",
     .source = "Bode, Network Analysis and Feedback Amplifier Design, 1945 (form); nodal analysis "
               "(formula)",
     .diagram = "    +-----R2------+\n"
                "in -+--C1--+--C2--+-- out\n"
                "           R1\n"
                "         ground\n"},
    {.name = "rc-ladder",
     .about = "n equal or unequal RC low-pass stages, each loading the one before",
     .formula = "n = 2: 1 / (1 + s (R1 C1 + R1 C2 + R2 C2) + s^2 R1 R2 C1 C2)",
     .source = "Van Valkenburg, Network Analysis, 3rd ed., ch. 11",
     .diagram = "in --R1--+--R2--+-- ... --Rn--+-- out\n"
                "         C1     C2            Cn\n"
                "       ground ground        ground\n"
                "(stages: n; R2.. and C2.. are as R1 and C1 unless given)\n"},
    {.name = "rlc-ladder-lowpass",
     .about = "LC low-pass between resistors, shunt capacitor first",
     .formula = "C1, L1 between R1 and R2: R2 / (R1 + R2 + s (L1 + R1 R2 C1) + s^2 L1 C1 R1), C1 "
                "at R1's end",
     .source = "Zverev, Handbook of Filter Synthesis (tables by order)",
     .diagram = "in --R1--+--L1--+--L2--+-- ... --+-- out\n"
                "         C1     C2     C3        R2\n"
                "       ground ground ground    ground\n"
                "(as many as are given, one after the other: C1, L1, C2, L2, ..; R1 and R2 may be "
                "left out)\n"},
    {.name = "rlc-ladder-lowpass-t",
     .about = "LC low-pass between resistors, series coil first",
     .formula = "L1, C1 between R1 and R2: R2 / (R1 + R2 + s (L1 + R1 R2 C1) + s^2 L1 C1 R2)",
     .source = "Zverev, Handbook of Filter Synthesis (tables by order)",
     .diagram = "in --R1--L1--+--L2--+-- ... --+-- out\n"
                "             C1     C2        R2\n"
                "           ground ground    ground\n"
                "(as many as are given, one after the other: L1, C1, L2, C2, ..)\n"},
    {.name = "rlc-ladder-highpass",
     .about = "LC high-pass between resistors, shunt coil first",
     .formula = "the low-pass with every 1/(s L) and s C exchanged",
     .source = "Zverev, Handbook of Filter Synthesis (tables by order)",
     .diagram = "in --R1--+--C1--+--C2--+-- ... --+-- out\n"
                "         L1     L2     L3        R2\n"
                "       ground ground ground    ground\n"},
    {.name = "rlc-ladder-highpass-t",
     .about = "LC high-pass between resistors, series capacitor first",
     .formula = "the low-pass with every 1/(s L) and s C exchanged",
     .source = "Zverev, Handbook of Filter Synthesis (tables by order)",
     .diagram = "in --R1--C1--+--C2--+-- ... --+-- out\n"
                "             L1     L2        R2\n"
                "           ground ground    ground\n"},
};
const int pw_cells_passive_count = ROWS(pw_cells_passive);
