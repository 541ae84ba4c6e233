/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "stagefile/keys.h"
#include "stagefile/stage.h"

const pw_word pw_method_words[] = {
    [PW_BILINEAR] = {"bilinear", "s = 2/T (z - 1)/(z + 1), on each root; see prewarp"},
    [PW_MATCHED_Z] = {"matched-z", "each root s becomes z = exp(s T); the gain is matched at one "
                                   "frequency"},
    [PW_IMPULSE_INVARIANT] = {"impulse-invariant", "the impulse response is T h(n T)"},
    [PW_STEP_INVARIANT] = {"step-invariant", "the step response is sampled: a zero-order hold "
                                             "before the stage"},
    [PW_BEST] = {"best", "all of them are tried; the smallest error over limits.band is kept"},
    {0},
};
const pw_word pw_prewarp_words[] = {
    {"none", "no frequency is met exactly but 0"},
    {"each-section", "each section is exact at its own natural frequency"},
    {0},
};
const pw_word pw_infinity_words[] = {
    [PW_INFINITY_NYQUIST] = {"nyquist", "every zero at infinity goes to z = -1"},
    [PW_INFINITY_KEEP_ONE] = {"keep-one", "one stays at infinity (one sample of delay), the others "
                                          "go to z = -1"},
    [PW_INFINITY_KEEP] = {"keep", "all stay at infinity: whole samples of delay"},
    {0},
};
const pw_word pw_sample_words[] = {
    [PW_FLOAT32] = {"float32", "float"},
    [PW_FLOAT64] = {"float64", "double"},
    [PW_Q31] = {"q31", "int32_t, 1.0 is 2^31"},
    [PW_Q15] = {"q15", "int16_t, 1.0 is 32768"},
    {0},
};
const pw_word pw_structure_words[] = {
    [PW_STRUCTURE_AUTO] = {"auto", "the one that suits the format, the poles and the target; the "
                                   "report says why"},
    [PW_DIRECT_1] = {"direct-1", "direct form I, one accumulator a section"},
    [PW_DIRECT_1_SHAPED] = {"direct-1-shaped", "direct form I that feeds its rounding error back; "
                                               "fixed point"},
    [PW_TRANSPOSED_2] = {"transposed-2", "transposed direct form II; floats"},
    [PW_COUPLED] = {"coupled", "the rotation form, for low frequencies and high Q; fixed point"},
    {0},
};
const pw_word pw_scaling_words[] = {
    [PW_SCALING_L1] = {"l1", "no input within signal.input.peak can clip a node"},
    [PW_SCALING_LINF] = {"linf", "no steady sine can"},
    [PW_SCALING_L2] = {"l2", "white noise keeps its rms at every node"},
    [PW_SCALING_NONE] = {"none", "the gain is left where the transform puts it"},
    {0},
};
const pw_word pw_signal_words[] = {
    [PW_SIGNAL_IMPULSE] = {"impulse", "one sample of the peak, then silence"},
    [PW_SIGNAL_STEP] = {"step", "the peak from the first sample on"},
    [PW_SIGNAL_SINE] = {"sine", "a sine in the band"},
    [PW_SIGNAL_SWEEP] = {"sweep", "a sine that runs through the band"},
    [PW_SIGNAL_NOISE] = {"noise", "pseudo-random samples from the seed"},
    [PW_SIGNAL_FULL_SCALE_SQUARE] = {"full-scale-square", "a square wave between the extreme "
                                                          "words"},
    [PW_SIGNAL_OVERFLOW_PROBE] = {"overflow-probe", "the input that drives the node nearest to its "
                                                    "clamp hardest"},
    [PW_SIGNAL_SILENCE] = {"silence", "zeros after a disturbance: limit cycles show"},
    {0},
};
const pw_word pw_approximation_words[] = {
    [PW_BUTTERWORTH] = {"butterworth", "maximally flat magnitude"},
    [PW_CHEBYSHEV] = {"chebyshev", "equal ripple in the pass band; needs ripple"},
    [PW_INVERSE_CHEBYSHEV] = {"inverse-chebyshev", "equal ripple in the stop band; needs stopband"},
    [PW_ELLIPTIC] = {"elliptic", "equal ripple in both; needs ripple and stopband"},
    [PW_BESSEL] = {"bessel", "maximally flat delay; see normalise"},
    [PW_CRITICALLY_DAMPED] = {"critically-damped", "all poles at one place"},
    [PW_LINKWITZ_RILEY] = {"linkwitz-riley", "two butterworth filters in a row; even orders"},
    {0},
};
const pw_word pw_shape_words[] = {
    [PW_LOWPASS] = {"lowpass", "passes below corner"},
    [PW_HIGHPASS] = {"highpass", "passes above corner"},
    [PW_BANDPASS] = {"bandpass", "passes between corners"},
    [PW_BANDSTOP] = {"bandstop", "stops between corners"},
    {0},
};
const pw_word pw_normalise_words[] = {
    [PW_NORMALISE_MAGNITUDE] = {"magnitude", "the corner is where the magnitude is down by "
                                             "corner-at"},
    [PW_NORMALISE_PHASE] = {"phase", "the corner is where the asymptotes of the magnitude meet"},
    [PW_NORMALISE_DELAY] = {"delay", "the delay at 0 Hz is 1/(2 pi corner)"},
    {0},
};
const pw_word pw_rounding_words[] = {
    {"nearest", "half up"}, {"truncate", "towards minus infinity, which leaves an offset"}, {0},
};
const pw_word pw_overflow_words[] = {
    {"saturate", "a sample too large stops at the largest word"},
    {"wrap", "it is reduced modulo the word"},
    {0},
};
const pw_word pw_section_order_words[] = {
    {"auto", "the order of the lowest noise without a clip"},
    {"as-listed", "the order of the poles in the file"},
    {0},
};
const pw_word pw_code_words[] = {
    {"runtime", "the C calls the runtime's kernels, which are copied in"},
    {"standalone", "the kernels are written out for this stage"},
    {0},
};
const pw_word pw_forbidden_words[] = {{"forbidden", "no node may be able to clip"}, {0}};
const pw_word pw_series_words[] = {
    {"E6", "six values a decade"},
    {"E12", "twelve"},
    {"E24", "twenty-four"},
    {"E96", "ninety-six"},
    {0},
};
const pw_word pw_distribution_words[] = {
    {"uniform", "anywhere within the tolerance"},
    {"normal", "the tolerance is three standard deviations"},
    {0},
};
const pw_word pw_op_amp_words[] = {{"ideal", "no current into its inputs, no voltage between them"},
                                   {0}};
const pw_word pw_q_words[] = {{"infinite", "on the imaginary axis; zeros only"}, {0}};
const pw_word pw_flag_words[] = {{"false", "no"}, {"true", "yes"}, {0}};

const char *pw_method_word(pw_method method) { return pw_method_words[method].word; }
const char *pw_sample_word(pw_sample sample) { return pw_sample_words[sample].word; }
const char *pw_structure_word(pw_structure structure) { return pw_structure_words[structure].word; }
const char *pw_scaling_word(pw_scaling scaling) { return pw_scaling_words[scaling].word; }
const char *pw_signal_word(pw_signal signal) { return pw_signal_words[signal].word; }
const char *pw_approximation_word(pw_approximation a) { return pw_approximation_words[a].word; }
const char *pw_shape_word(pw_shape shape) { return pw_shape_words[shape].word; }
