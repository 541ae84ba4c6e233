/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Runs an AVR program on libsimavr: avr_runner MCU PROGRAM.elf
 * GPIOR0 is the console, GPIOR2 the exit status, GPIOR1 latches the cycle counter at r25:r24
 * (see targets/shared/avr.c). A crash of the core or 4e9 cycles without an end exit with 98. */
#include <simavr/sim_avr.h>
#include <simavr/sim_elf.h>
#include <simavr/sim_io.h>
#include <stdarg.h>
#include <stdio.h>

enum { GPIOR0 = 0x3E, GPIOR1 = 0x4A, GPIOR2 = 0x4B };   /* data-space addresses on ATmega parts */

static int finished, status;

static void console(avr_t *avr, avr_io_addr_t at, uint8_t value, void *unused)
{
    (void)avr, (void)at, (void)unused;
    putchar(value);
}

static void end(avr_t *avr, avr_io_addr_t at, uint8_t value, void *unused)
{
    (void)avr, (void)at, (void)unused;
    finished = 1;
    status = value;
}

static void latch(avr_t *avr, avr_io_addr_t at, uint8_t value, void *unused)
{
    (void)at, (void)value, (void)unused;
    unsigned where = avr->data[24] | (unsigned)avr->data[25] << 8;
    uint32_t cycles = (uint32_t)avr->cycle;
    for (int i = 0; i < 4; i++) avr->data[where + (unsigned)i] = (uint8_t)(cycles >> 8 * i);
}

/* libsimavr tells what it loads on standard output, which is the program's. */
static void silent(avr_t *avr, const int level, const char *format, va_list more)
{
    (void)avr, (void)level, (void)format, (void)more;
}

int main(int argc, char **argv)
{
    static elf_firmware_t firmware;
    avr_global_logger_set(silent);
    if (argc != 3 || elf_read_firmware(argv[2], &firmware)) {
        fprintf(stderr, "usage: avr_runner MCU PROGRAM.elf\n");
        return 97;
    }
    avr_t *avr = avr_make_mcu_by_name(argv[1]);
    if (!avr) {
        fprintf(stderr, "avr_runner: unknown MCU %s\n", argv[1]);
        return 97;
    }
    avr_init(avr);
    avr_load_firmware(avr, &firmware);
    avr_register_io_write(avr, GPIOR0, console, NULL);
    avr_register_io_write(avr, GPIOR1, latch, NULL);
    avr_register_io_write(avr, GPIOR2, end, NULL);
    while (!finished) {
        int state = avr_run(avr);
        if (state == cpu_Done || state == cpu_Crashed || avr->cycle > 4000000000u) return 98;
    }
    fflush(stdout);
    return status;
}
