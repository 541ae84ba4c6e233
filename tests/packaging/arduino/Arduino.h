/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The few declarations of an Arduino-style core that the example sketch uses, so that it compiles. */
#include <stdint.h>
static const uint8_t A0 = 14;
int analogRead(uint8_t pin);
void delayMicroseconds(unsigned int us);
struct Port { void begin(unsigned long baud); void println(unsigned int value); };
extern Port Serial;
