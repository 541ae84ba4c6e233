/* SPDX-License-Identifier: 0BSD */
/* Four strain gauges sampled by a timer interrupt; main sends what has passed the filter. On this
 * machine a loop plays the interrupt and a made-up converter the gauges. */
#include <stdint.h>
#include <stdio.h>

#include "hull_strain.h"

#define CHANNELS 4
#define RING 64                  /* a power of two; one writer, one reader */

static hull_strain_state filter[CHANNELS];       /* the interrupt's own */
static volatile uint16_t ring[RING][CHANNELS];
static volatile uint8_t written, taken;

static uint16_t convert(int channel, unsigned tick)
{
    return (uint16_t)(2048 + 100 * channel + (tick & 1 ? 300 : -300));   /* level and ripple */
}

static void timer_interrupt(unsigned tick)       /* 8 kHz */
{
    for (int c = 0; c < CHANNELS; c++) {
        int16_t y = hull_strain_step(&filter[c], hull_strain_from_code(convert(c, tick)));
        ring[written % RING][c] = hull_strain_to_code(y);
    }
    written++;                   /* last: the reader sees whole rows only */
}

int main(void)
{
    unsigned last[CHANNELS] = {0};
    for (int c = 0; c < CHANNELS; c++)           /* before the interrupt is enabled */
        hull_strain_settle(&filter[c], hull_strain_from_code(2048));
    for (unsigned tick = 0; tick < 4000; tick++) {
        timer_interrupt(tick);
        while (taken != written) {
            for (int c = 0; c < CHANNELS; c++) last[c] = ring[taken % RING][c];
            taken++;
        }
    }
    for (int c = 0; c < CHANNELS; c++)
        printf("gauge %d: code %u, clipped %lu times\n", c, last[c], (unsigned long)hull_strain_clipped(&filter[c]));
    return 0;
}
