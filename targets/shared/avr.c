/* SPDX-License-Identifier: 0BSD */
/* An ATmega under the runner of tests/targets/avr_runner.c: a byte written to GPIOR0 is printed, one
 * written to GPIOR2 ends the run, one to GPIOR1 makes the runner latch its cycle counter at the
 * address in r25:r24. avr-libc gives the start-up. */
#include <avr/io.h>
#include <stdlib.h>
#include "part.h"

void part_write(const char *text)
{
    while (*text) GPIOR0 = (uint8_t)*text++;
}

void part_exit(int status)
{
    GPIOR2 = (uint8_t)status;
    for (;;) {}
}

uint32_t part_count(void)
{
    uint32_t count = 0;
    register uint32_t *where __asm__("r24") = &count;
    __asm__ volatile("out %1, r24" : : "r"(where), "I"(_SFR_IO_ADDR(GPIOR1)) : "memory");
    return count;
}

/* avr-libc's start-up calls this with what main returned. */
void exit(int status)
{
    part_exit(status);
    for (;;) {}
}
