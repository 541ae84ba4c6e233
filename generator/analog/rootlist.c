/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analog/rootlist.h"
#include "base/text.h"

#include <math.h>

static bool add(double complex *list, int *count, double complex root)
{
    double re = creal(root), im = fabs(cimag(root));
    if (*count + (im != 0 ? 2 : 1) > PW_MAX_ROOTS)
        return false;
    list[(*count)++] = CMPLX(re + 0.0, im);       /* + 0.0: no root at minus 0 */
    if (im != 0)
        list[(*count)++] = CMPLX(re + 0.0, -im);
    return true;
}

bool pw_roots_add_pole(pw_roots *roots, double complex pole, pw_where at, pw_messages *messages)
{
    if (add(roots->pole, &roots->poles, pole))
        return true;
    pw_error(messages, at,
             "more than %d poles; expected at most %d in a whole stage, cascades included",
             PW_MAX_ROOTS, PW_MAX_ROOTS);
    return false;
}

bool pw_roots_add_zero(pw_roots *roots, double complex zero, pw_where at, pw_messages *messages)
{
    if (add(roots->zero, &roots->zeros, zero))
        return true;
    pw_error(messages, at,
             "more than %d zeros; expected at most %d in a whole stage, cascades included",
             PW_MAX_ROOTS, PW_MAX_ROOTS);
    return false;
}

bool pw_roots_append(pw_roots *whole, const pw_roots *part, pw_where at, pw_messages *messages)
{
    whole->factor *= part->factor;
    for (int i = 0; i < part->poles; i++)
        if (cimag(part->pole[i]) >= 0 && !pw_roots_add_pole(whole, part->pole[i], at, messages))
            return false;
    for (int i = 0; i < part->zeros; i++)
        if (cimag(part->zero[i]) >= 0 && !pw_roots_add_zero(whole, part->zero[i], at, messages))
            return false;
    return true;
}

/* "-5" or "-5 ± 3j". */
static void write_root(char *text, size_t room, double complex root)
{
    char re[PW_NUMBER_ROOM], im[PW_NUMBER_ROOM];
    pw_shortest(re, creal(root));
    pw_shortest(im, fabs(cimag(root)));
    if (cimag(root) == 0)
        snprintf(text, room, "%s", re);
    else
        snprintf(text, room, "%s ± %sj", re, im);
}

bool pw_roots_check_pole(double complex pole, pw_where at, pw_messages *messages)
{
    char text[2 * PW_NUMBER_ROOM + 8];
    if (creal(pole) < 0 || pole == 0)
        return true;
    write_root(text, sizeof text, pole);
    if (creal(pole) > 0)
        pw_error(messages, at,
                 "a pole at %s rad/s is in the right half plane, so the stage is unstable; "
                 "expected poles with a negative real part", text);
    else
        pw_error(messages, at,
                 "a pole at %s rad/s is on the imaginary axis, so the stage oscillates; "
                 "expected poles with a negative real part, or at 0", text);
    return false;
}
