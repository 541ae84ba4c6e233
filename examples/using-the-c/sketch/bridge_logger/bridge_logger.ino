// SPDX-License-Identifier: 0BSD
// hull_strain.h, hull_strain.c and the pw_ files that `polewright build` wrote stand beside this file.
#include "hull_strain.h"

static hull_strain_state bridge;

void setup()
{
    Serial.begin(115200);
    // The converter of the board has 10 bits, the stage file says 12: two bits up.
    hull_strain_settle(&bridge, hull_strain_from_code(analogRead(A0) << 2));
}

void loop()
{
    int16_t y = hull_strain_step(&bridge, hull_strain_from_code(analogRead(A0) << 2));
    Serial.println(hull_strain_to_code(y));
    delayMicroseconds(125);   // a timer interrupt keeps the rate better: see plain-make/main.c
}
