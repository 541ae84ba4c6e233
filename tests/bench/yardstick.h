/* SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef YARDSTICK_H
#define YARDSTICK_H

#include <stdint.h>

void plain_float(const float (*word)[5], float (*delay)[2], int sections, const float *from, float *to, int samples);
void plain_q31(const int32_t (*word)[5], int32_t (*past)[4], int sections, const int32_t *from, int32_t *to, int samples);
void plain_q15(const int16_t (*word)[5], int16_t (*past)[4], int sections, const int16_t *from, int16_t *to, int samples);

#endif
