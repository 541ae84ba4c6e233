/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Cells that are active second-order filters, and all-passes. */
#include "analog/cell.h"

#define ROWS(table) ((int)(sizeof(table) / sizeof((table)[0])))

#define STATE_VARIABLE(output)                                                                     \
    "R1 in m; R2 " output##LOW " m; R3 m " output##HIGH "; R4 " output##BAND                       \
        " p; R5 p ground; U1 p m " output##HIGH "; R6 " output##HIGH " x; C1 x " output##BAND      \
        "; U2 ground x " output##BAND "; R7 " output##BAND " y; C2 y " output##LOW                 \
        "; U3 ground y " output##LOW

#define FROM_LOW_LOW "out"
#define FROM_LOW_BAND "b"
#define FROM_LOW_HIGH "h"
#define FROM_BAND_LOW "l"
#define FROM_BAND_BAND "out"
#define FROM_BAND_HIGH "h"
#define FROM_HIGH_LOW "l"
#define FROM_HIGH_BAND "b"
#define FROM_HIGH_HIGH "out"

#define STATE_VARIABLE_DIAGRAM \
    "in --R1--+--R3-------+\n" \
    "  low-R2-+-m-[-]--high-R6-x-[-]--band-R7-y-[-]--low\n" \
    "       p-----[+]     C1 across U2     C2 across U3\n" \
    " band-R4-p-R5-ground\n"
#define STATE_VARIABLE_SOURCE "Franco, ch. 3 (example 3.18); Kerwin, Huelsman, Newcomb 1967"

#define TWO_INTEGRATOR_DIAGRAM \
    "in --R1--+--R2||C1--+          +--C2--+         +--R5--+\n" \
    "         +---[-]----+--R3------+-[-]--+--R4-----+-[-]--+--inverted\n" \
    "inverted-R6-+      band               low\n"
#define TWO_INTEGRATOR_SOURCE "Franco, ch. 3 (biquad); Tow 1968, Thomas 1971"

const pw_cell_kind pw_cells_filter[] = {
    {.name = "sallen-key-lowpass",
     .about = "Sallen-Key low-pass, gain K = 1 + R4/R3",
     .net = "R1 in a; C1 a out; R2 a b; C2 b ground; R3?open m ground; R4?short m out; U1 b m out",
     .formula = "K / (1 + s (R1 C2 + R2 C2 + R1 C1 (1 - K)) + s^2 R1 R2 C1 C2)",
     .source = "Franco, ch. 3 (examples 3.8, 3.11); Sallen and Key 1955",
     .diagram = "         +----C1------+\n"
                "in --R1--+--R2--+-[+]-+-- out\n"
                "                C2 [-]--R4-- out\n"
                "            ground   +--R3-- ground\n"},
    {.name = "sallen-key-highpass",
     .about = "Sallen-Key high-pass, gain K = 1 + R4/R3",
     .net = "C1 in a; R1 a out; C2 a b; R2 b ground; R3?open m ground; R4?short m out; U1 b m out",
     .formula = "K s^2 R1 R2 C1 C2 / (1 + s (R1 C1 + R1 C2 + R2 C2 (1 - K)) + s^2 R1 R2 C1 C2)",
     .source = "Franco, ch. 3 (example 3.12)",
     .diagram = "         +----R1------+\n"
                "in --C1--+--C2--+-[+]-+-- out\n"
                "                R2 [-]--R4-- out\n"
                "            ground   +--R3-- ground\n"},
    {.name = "sallen-key-bandpass",
     .about = "Sallen-Key band-pass, gain K = 1 + R5/R4",
     .net = "R1 in a; C1 a ground; R3 a out; C2 a b; R2 b ground; R4?open m ground; R5?short m "
            "out; U1 b m out",
     .formula = "K s/(R1 C1) / (s^2 + s (1/(R1 C1) + 1/(R2 C1) + 1/(R2 C2) + (1 - K)/(R3 C1)) + "
                "(R1 + R3)/(R1 R2 R3 C1 C2))",
     .source = "Franco, ch. 3 (KRC band-pass)",
     .diagram = "         +------R3------+\n"
                "in --R1--+--C2--+---[+]-+-- out\n"
                "         C1     R2  [-]--R5-- out\n"
                "      ground ground   +--R4-- ground\n"},
    {.name = "mfb-lowpass",
     .about = "Multiple-feedback low-pass",
     .net = "R1 in a; C1 a ground; R2 a m; R3 a out; C2 m out; U1 ground m out",
     .formula = "-(R3/R1) / (1 + s C2 (R2 + R3 + R2 R3/R1) + s^2 R2 R3 C1 C2)",
     .source = "Franco, ch. 3 (example 3.16)",
     .diagram = "         +--R3---------+\n"
                "         |      +--C2--+\n"
                "in --R1--+--R2--m-[-]--+-- out\n"
                "         C1 ground[+]\n"
                "       ground\n"},
    {.name = "mfb-highpass",
     .about = "Multiple-feedback high-pass",
     .net = "C1 in a; R1 a ground; C2 a m; C3 a out; R2 m out; U1 ground m out",
     .formula = "-(C1/C3) s^2 R1 R2 C2 C3 / (1 + s R1 (C1 + C2 + C3) + s^2 R1 R2 C2 C3)",
     .source = "Franco, ch. 3; Williams and Taylor, Electronic Filter Design Handbook",
     .diagram = "         +--C3---------+\n"
                "         |      +--R2--+\n"
                "in --C1--+--C2--m-[-]--+-- out\n"
                "         R1 ground[+]\n"
                "       ground\n"},
    {.name = "mfb-bandpass",
     .about = "Multiple-feedback band-pass",
     .net = "R1 in a; R2?open a ground; C1 a m; C2 a out; R3 m out; U1 ground m out",
     .formula = "-s R3 C1 (Rp/R1) / (1 + s Rp (C1 + C2) + s^2 Rp R3 C1 C2), Rp = R1 || R2",
     .source = "Franco, ch. 3 (multiple-feedback band-pass)",
     .diagram = "         +--C2---------+\n"
                "         |      +--R3--+\n"
                "in --R1--+--C1--m-[-]--+-- out\n"
                "         R2 ground[+]\n"
                "       ground\n"},
    {.name = "state-variable-lowpass",
     .about = "State-variable filter, low-pass output",
     .net = STATE_VARIABLE(FROM_LOW_),
     .formula = "-(R2/R1) / (1 + s k R2 R7 C2 (1/R1 + 1/R2 + 1/R3) + s^2 (R2/R3) R6 R7 C1 C2), k = "
                "R5/(R4 + R5)",
     .source = STATE_VARIABLE_SOURCE,
     .diagram = STATE_VARIABLE_DIAGRAM},
    {.name = "state-variable-bandpass",
     .about = "State-variable filter, band-pass output",
     .net = STATE_VARIABLE(FROM_BAND_),
     .formula = "(R2/R1) s R7 C2 / (the same denominator)",
     .source = STATE_VARIABLE_SOURCE,
     .diagram = STATE_VARIABLE_DIAGRAM},
    {.name = "state-variable-highpass",
     .about = "State-variable filter, high-pass output",
     .net = STATE_VARIABLE(FROM_HIGH_),
     .formula = "-(R2/R1) s^2 R6 R7 C1 C2 / (the same denominator)",
     .source = STATE_VARIABLE_SOURCE,
     .diagram = STATE_VARIABLE_DIAGRAM},
    {.name = "two-integrator-lowpass",
     .about = "Two-integrator loop with an inverter, low-pass output",
     .net = "R1 in m; R2 m b; C1 m b; U1 ground m b; R3 b x; C2 x out; U2 ground x out; "
            "R4 out y; R5 y i; U3 ground y i; R6 i m",
     .formula = "(R6 R4 / (R1 R5)) / (1 + s R3 R6 C2 R4/(R2 R5) + s^2 R3 R6 C1 C2 R4/R5)",
     .source = TWO_INTEGRATOR_SOURCE,
     .diagram = TWO_INTEGRATOR_DIAGRAM},
    {.name = "two-integrator-bandpass",
     .about = "Two-integrator loop with an inverter, band-pass output",
     .net = "R1 in m; R2 m out; C1 m out; U1 ground m out; R3 out x; C2 x l; U2 ground x l; "
            "R4 l y; R5 y i; U3 ground y i; R6 i m",
     .formula = "-s R3 C2 (R6 R4 / (R1 R5)) / (the same denominator)",
     .source = TWO_INTEGRATOR_SOURCE,
     .diagram = TWO_INTEGRATOR_DIAGRAM},
    {.name = "twin-t-notch",
     .about = "Twin-T notch with bootstrapping, k = R5/(R4 + R5)",
     .net = "R1 in a; C1 in b; R2 a c; C2 b c; R3 b t; C3 a t; U1 c out out; R4?open out d; "
            "R5?short d ground; U2 d t t",
     .formula = "R1 = R2 = R, R3 = R/2, C1 = C2 = C, C3 = 2C: (1 + (s/w0)^2) / (1 + 4 (1 - k) s/w0 "
                "+ (s/w0)^2), w0 = 1/(R C)",
     .source = "Horowitz and Hill, 6.3 (bootstrapped twin-T); nodal analysis (formula)",
     .diagram = "    +--R1--+--R2--+        \n"
                "    |      C3     |        \n"
                "    |      t      +-[U1 x1]--+-- out\n"
                "in -+             |          R4\n"
                "    +--C1--+--C2--+          +-[U2 x1]-- t\n"
                "           R3                R5\n"
                "           t               ground\n"},
    {.name = "all-pass-1",
     .about = "All-pass of first order (R1 = R2)",
     .net = "R1 in m; R2 m out; R3 in p; C1 p ground; U1 p m out",
     .formula = "(1 - s R3 C1 R2/R1) / (1 + s R3 C1)",
     .source = "Franco, ch. 3 (phase shifter)",
     .diagram = "    +--R1--m--R2--+\n"
                "in -+      +-[-]--+-- out\n"
                "    +--R3--+-[+]\n"
                "           C1\n"
                "         ground\n"},
    {.name = "all-pass-2",
     .about = "All-pass of second order: 2 k R1 (C1 + C2) = (1 - k) C1 R2, k = R4/(R3 + R4)",
     .net = "R1 in a; C1 a m; C2 a out; R2 m out; R3 in p; R4 p ground; U1 p m out",
     .formula = "k (1 + s (R1 (C1 + C2) - C1 R2 (1 - k)/k) + s^2 R1 R2 C1 C2) / (1 + s R1 (C1 + "
                "C2) + s^2 R1 R2 C1 C2)",
     .source = "Delyiannis 1969; Williams and Taylor; nodal analysis (formula)",
     .diagram = "        +--C2---------+\n"
                "        |      +--R2--+\n"
                "in -R1--+--C1--m-[-]--+-- out\n"
                " +--R3--p--------[+]\n"
                "        R4\n"
                "      ground\n"},
};
const int pw_cells_filter_count = ROWS(pw_cells_filter);
