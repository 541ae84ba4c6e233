/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Numbers of 113 bits for this station's working: roots and factors are found in them and rounded
 * once, at the end. Include this before any other header: it asks the C library for the f128
 * functions, which only the first inclusion of math.h and complex.h can grant. */
#ifndef PW_ANALOG_WIDE_H
#define PW_ANALOG_WIDE_H

#if defined(_MATH_H) || defined(_COMPLEX_H)
#error "include analog/wide.h before math.h and complex.h"
#endif
#ifndef __STDC_WANT_IEC_60559_TYPES_EXT__
#define __STDC_WANT_IEC_60559_TYPES_EXT__ 1
#endif
#include <complex.h>
#include <math.h>

typedef _Float128 pw_wide;
typedef _Complex _Float128 pw_wide_complex;

#define PW_WIDE_EPSILON 1.92592994438723585305597794258492732e-34F128   /* 2^-112 */
#define PW_WIDE_PI      3.14159265358979323846264338327950288F128
#define PW_WIDE_COMPLEX(re, im) __builtin_complex((pw_wide)(re), (pw_wide)(im))

#endif
