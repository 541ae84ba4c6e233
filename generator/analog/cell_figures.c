/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What a designer computes by hand: f0, Q and gain of each cell. Sources as in the cells' rows. */
#include <string.h>

#include "analog/cell.h"

static const struct { const char *name, *figures;
} rows[] = {
    {"rc-lowpass", "f0 = 1/(2 pi R1 C1); gain 1"},
    {"rc-highpass", "f0 = 1/(2 pi R1 C1); gain 1"},
    {"rl-lowpass", "f0 = R1/(2 pi L1); gain 1"},
    {"rl-highpass", "f0 = R1/(2 pi L1); gain 1"},
    {"lead", "zero at 1/(2 pi R1 C1), pole (R1 + R2)/R2 times higher; gain R2/(R1 + R2) at DC"},
    {"lag", "zero at 1/(2 pi R2 C1), pole (R1 + R2)/R2 times lower; gain 1 at DC"},
    {"twin-t", "f0 = 1/(2 pi R C), Q = 1/4; gain 1"},
    {"bridged-t", "f0 = 1/(2 pi sqrt(R1 R2 C1 C2)), Q = sqrt(R1 R2 C1 C2)/(R1 (C1 + C2) + R2 C2); "
                  "gain 1, at f0 R1 (C1 + C2)/(R1 (C1 + C2) + R2 C2)"},
    {"rc-ladder",
     "n equal stages: -3 dB near 1/(2 pi R C) divided by 2.67, 5.15, 8.44 for n of 2, 3, 4"},
    {"rlc-ladder-lowpass",
     "from prototype values g at a corner f0 and resistance R: C = g/(2 pi f0 R), "
     "L = g R/(2 pi f0); gain R2/(R1 + R2)"},
    {"rlc-ladder-lowpass-t", "as rlc-ladder-lowpass"},
    {"rlc-ladder-highpass", "from prototype values g: C = 1/(2 pi f0 R g), L = R/(2 pi f0 g); gain "
                            "R2/(R1 + R2) far above"},
    {"rlc-ladder-highpass-t", "as rlc-ladder-highpass"},
    {"inverting", "f0 = 1/(2 pi R2 C1); gain -R2/R1"},
    {"non-inverting", "f0 = 1/(2 pi R1 C1); gain 1 + R3/R2"},
    {"integrator", "gain 1 at 1/(2 pi R1 C1)"},
    {"integrator-lead-zero", "zero at 1/(2 pi R2 C1); gain -R2/R1 above it"},
    {"compensator-type-1", "gain 1 at 1/(2 pi R1 C1)"},
    {"compensator-type-2", "zero at 1/(2 pi R2 C1), pole (C1 + C2)/C2 times higher"},
    {"compensator-type-3",
     "zeros at 1/(2 pi R3 C2) and 1/(2 pi (R1 + R2) C1), poles at 1/(2 pi R2 C1) "
     "and (C2 + C3)/(2 pi R3 C2 C3)"},
    {"differentiator", "gain 1 at 1/(2 pi R2 C1), pole at 1/(2 pi R1 C1)"},
    {"charge-amplifier", "f0 = 1/(2 pi R2 C2); gain -C1/C2 above it"},
    {"transimpedance", "f0 = 1/(2 pi R1 C1); gain -R1 ohm"},
    {"shelving-low",
     "gain -(R2 + R3)/R1 below 1/(2 pi R3 C1), -R2/R1 above (R2 + R3)/R2 times that"},
    {"shelving-high", "gain -R3/R1 below 1/(2 pi (R1 + R2) C1), -R3 (R1 + R2)/(R1 R2) above "
                      "1/(2 pi R2 C1)"},
    {"phono-equaliser", "time constants R2 C2 (3180 us), R3 C3 (75 us), about (R2 || R3)(C2 + C3) "
                        "(318 us); gain 1 + (R2 + R3)/R1 at the low end"},
    {"sallen-key-lowpass", "f0 = 1/(2 pi sqrt(R1 R2 C1 C2)), 1/Q = (1 - K) sqrt(R1 C1/(R2 C2)) + "
                           "sqrt(R1 C2/(R2 C1)) + sqrt(R2 C2/(R1 C1)); gain K"},
    {"sallen-key-highpass", "f0 = 1/(2 pi sqrt(R1 R2 C1 C2)), 1/Q = (1 - K) sqrt(R2 C2/(R1 C1)) + "
                            "sqrt(R1 C2/(R2 C1)) + sqrt(R1 C1/(R2 C2)); gain K"},
    {"sallen-key-bandpass", "f0 = sqrt((1 + R1/R3)/(R1 R2 C1 C2))/(2 pi); all R and C equal: "
                            "Q = sqrt 2/(4 - K), gain K/(4 - K) at f0"},
    {"mfb-lowpass", "f0 = 1/(2 pi sqrt(R2 R3 C1 C2)), Q = sqrt(C1/C2)/(sqrt(R2 R3)/R1 + "
                    "sqrt(R3/R2) + sqrt(R2/R3)); gain -R3/R1"},
    {"mfb-highpass", "f0 = 1/(2 pi sqrt(R1 R2 C2 C3)), Q = sqrt(R2/R1) sqrt(C2 C3)/(C1 + C2 + C3); "
                     "gain -C1/C3"},
    {"mfb-bandpass", "f0 = 1/(2 pi sqrt(Rp R3 C1 C2)), Rp = R1 || R2, Q = sqrt(R3/Rp) "
                     "sqrt(C1 C2)/(C1 + C2); gain -R3 C1/(R1 (C1 + C2)) at f0"},
    {"state-variable-lowpass", "f0 = sqrt(R3/(R2 R6 R7 C1 C2))/(2 pi); all of R1, R2, R3 equal and "
                               "R6 C1 = R7 C2: Q = (1 + R4/R5)/3; gain -R2/R1"},
    {"state-variable-bandpass", "f0 and Q as the low-pass; gain (R4 + R5)/(R5 R1 (1/R1 + 1/R2 + "
                                "1/R3)) at f0"},
    {"state-variable-highpass", "f0 and Q as the low-pass; gain -R3/R1"},
    {"two-integrator-lowpass", "f0 = sqrt(R5/(R3 R4 R6 C1 C2))/(2 pi), Q = 2 pi f0 R2 C1; "
                               "gain R4 R6/(R1 R5)"},
    {"two-integrator-bandpass", "f0 and Q as the low-pass; gain -R2/R1 at f0"},
    {"twin-t-notch", "f0 = 1/(2 pi R C), Q = 1/(4 (1 - k)); gain 1"},
    {"all-pass-1", "f0 = 1/(2 pi R3 C1), where the phase is -90 deg; gain 1"},
    {"all-pass-2",
     "f0 = 1/(2 pi sqrt(R1 R2 C1 C2)), Q = sqrt(R2/R1) sqrt(C1 C2)/(C1 + C2); gain k"},
};

const char *pw_cell_figures(const char *name)
{
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++)
        if (!strcmp(rows[i].name, name)) return rows[i].figures;
    return NULL;
}
