/* SPDX-License-Identifier: 0BSD */
/* What a test program may ask of an emulated part. Each start-up file gives these. */
#ifndef PART_H
#define PART_H

#include <stdint.h>

void part_write(const char *text);       /* to the host's standard output */
void part_exit(int status);              /* ends the run; the emulator exits with it */
uint32_t part_count(void);               /* instructions so far (AVR: cycles); the host has none: 0 */

#endif
