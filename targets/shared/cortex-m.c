/* SPDX-License-Identifier: 0BSD */
/* Start-up for every Cortex-M under qemu: vector table, memory, FPU and vector unit on, SysTick as
 * an instruction counter, semihosting for text and the exit status.
 * Counting: with -icount shift=6 an instruction takes 64 ns of the machine's time; PART_TICK_PS is
 * the time of one SysTick tick, shorter than an instruction on every board used here. */
#include <stddef.h>
#include "part.h"

extern uint32_t part_stack_top, part_data_start, part_data_end, part_data_load, part_bss_start, part_bss_end;
int main(void);
void part_start(void);
void part_fault(void);

__attribute__((section(".vectors"), used)) static void *const vectors[16] = {
    &part_stack_top, (void *)part_start, (void *)part_fault, (void *)part_fault, (void *)part_fault,
    (void *)part_fault, (void *)part_fault,
};

#define CPACR (*(volatile uint32_t *)0xE000ED88u)
#define SYST_CSR (*(volatile uint32_t *)0xE000E010u)
#define SYST_RVR (*(volatile uint32_t *)0xE000E014u)
#define SYST_CVR (*(volatile uint32_t *)0xE000E018u)

static int semihost(int operation, const void *argument)
{
    register int r0 __asm__("r0") = operation;
    register const void *r1 __asm__("r1") = argument;
    __asm__ volatile("bkpt 0xab" : "+r"(r0) : "r"(r1) : "memory");
    return r0;
}

void part_write(const char *text)
{
    semihost(0x04, text);                                    /* SYS_WRITE0 */
}

void part_exit(int status)
{
    const uint32_t block[2] = {0x20026u, (uint32_t)status};  /* ADP_Stopped_ApplicationExit */
    semihost(0x20, block);                                   /* SYS_EXIT_EXTENDED */
    for (;;) {}
}

void part_fault(void)
{
    part_write("fault\n");
    part_exit(99);
}

uint32_t part_count(void)
{
    uint32_t ticks = 0xFFFFFFu - SYST_CVR;
    return (uint32_t)((uint64_t)ticks * PART_TICK_PS / 64000u);
}

__attribute__((noreturn)) void part_start(void)
{
    uint32_t *from = &part_data_load;
    for (uint32_t *to = &part_data_start; to < &part_data_end;) *to++ = *from++;
    for (uint32_t *to = &part_bss_start; to < &part_bss_end;) *to++ = 0;
#if defined __ARM_FP || defined __ARM_FEATURE_MVE
    CPACR |= 0xFu << 20;                                     /* CP10 and CP11: full access */
    __asm__ volatile("dsb\n isb" ::: "memory");
#endif
    SYST_RVR = 0xFFFFFFu;
    SYST_CVR = 0;
    SYST_CSR = 5;                                            /* on, core clock, no interrupt */
    part_exit(main());
    for (;;) {}
}
