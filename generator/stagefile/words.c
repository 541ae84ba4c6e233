/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The words of the enumerations, as the stage file spells them: in the order of each enum. */
#include "stagefile/stage.h"

#define WORD(list, index) \
    ((size_t)(index) < sizeof(list) / sizeof *(list) ? (list)[(size_t)(index)] : "unknown")

const char *pw_method_word(pw_method method)
{
    static const char *const word[] = {"bilinear", "matched-z", "impulse-invariant",
                                       "step-invariant", "best"};
    return WORD(word, method);
}

const char *pw_sample_word(pw_sample sample)
{
    static const char *const word[] = {"float32", "float64", "q31", "q15"};
    return WORD(word, sample);
}

const char *pw_structure_word(pw_structure structure)
{
    static const char *const word[] = {"auto", "direct-1", "direct-1-shaped", "transposed-2",
                                       "coupled"};
    return WORD(word, structure);
}

const char *pw_scaling_word(pw_scaling scaling)
{
    static const char *const word[] = {"l1", "linf", "l2", "none"};
    return WORD(word, scaling);
}

const char *pw_signal_word(pw_signal signal)
{
    static const char *const word[] = {"impulse", "step", "sine", "sweep", "noise",
                                       "full-scale-square", "overflow-probe", "silence"};
    return WORD(word, signal);
}

const char *pw_approximation_word(pw_approximation approximation)
{
    static const char *const word[] = {"butterworth", "chebyshev", "inverse-chebyshev", "elliptic",
                                       "bessel", "critically-damped", "linkwitz-riley"};
    return WORD(word, approximation);
}

const char *pw_shape_word(pw_shape shape)
{
    static const char *const word[] = {"lowpass", "highpass", "bandpass", "bandstop"};
    return WORD(word, shape);
}
