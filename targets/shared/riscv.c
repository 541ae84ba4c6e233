/* SPDX-License-Identifier: 0BSD */
/* Start-up for 32-bit RISC-V under qemu's virt machine: the UART takes bytes at 0x10000000, the
 * test device at 0x100000 ends the run. minstret counts instructions (exact with -icount shift=0). */
#include "part.h"

int main(void);
void part_run(void);

__asm__(".section .vectors,\"ax\"\n"
        ".globl part_start\n"
        "part_start:\n"
        ".option push\n.option norelax\n"
        "la gp, __global_pointer$\n"
        ".option pop\n"
        "la sp, part_stack_top\n"
        ".option push\n.option arch,+zicsr\n"
        "li t0, 0x2000\n"             /* mstatus.FS: floating point on, where there is any */
        "csrs mstatus, t0\n"
        "la t0, part_fault\n"
        "csrw mtvec, t0\n"
        ".option pop\n"
        "j part_run\n"
        ".align 2\n"
        "part_fault:\n"
        "li a0, 99\n"
        "j part_exit\n"
        ".text\n");

void part_write(const char *text)
{
    while (*text) *(volatile uint8_t *)0x10000000u = (uint8_t)*text++;
}

void part_exit(int status)
{
    *(volatile uint32_t *)0x100000u = status ? (uint32_t)status << 16 | 0x3333u : 0x5555u;
    for (;;) {}
}

uint32_t part_count(void)
{
    uint32_t count;
    __asm__ volatile(".option push\n.option arch,+zicsr\ncsrr %0, minstret\n.option pop" : "=r"(count) :: "memory");
    return count;
}

void part_run(void)
{
    extern uint32_t part_bss_start, part_bss_end;
    for (uint32_t *to = &part_bss_start; to < &part_bss_end;) *to++ = 0;
    part_exit(main());
}
