/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "stagefile/manual.h"

#include <string.h>

#include "base/roff.h"
#include "stagefile/keys.h"

static void add_words(pw_text *out, const pw_word *words)
{
    pw_text_add(out, ".Bl -tag -width Ds -compact\n");
    for (const pw_word *w = words; w->word; w++) {
        pw_text_add(out, ".It Ql ");
        pw_roff_add(out, w->word);
        pw_text_add(out, "\n");
        pw_roff_add(out, w->help ? w->help : "");
        pw_text_add(out, "\n");
    }
    pw_text_add(out, ".El\n");
}

static void add_default(pw_text *out, const pw_key *key)
{
    if (key->needed) pw_text_add(out, "Needed.\n");
    else if (key->fallback && *key->fallback) {
        pw_text_add(out, "Default:\n.Ql ");
        pw_roff_add(out, key->fallback);
        pw_text_add(out, " .\n");
    } else if (key->otherwise) {
        pw_text_add(out, "Default: ");
        pw_roff_add(out, key->otherwise);
        pw_text_add(out, ".\n");
    }
}

static void add_key(pw_text *out, const pw_key *key)
{
    pw_text expected = {0};
    pw_text_print(out, ".It Cm ");
    pw_roff_add(out, key->name);
    pw_text_add(out, "\n");
    pw_roff_add(out, key->help);
    pw_text_add(out, ".\nIt is ");
    pw_key_expected(key, &expected);
    pw_roff_add(out, pw_text_string(&expected));
    pw_text_add(out, ".\n");
    add_default(out, key);
    if (key->words && key->forms & PW_FORM_WORD && key->words[0].word && key->words[1].word)
        add_words(out, key->words);
    pw_text_free(&expected);
}

static void add_map(pw_text *out, const pw_key_map *map)
{
    pw_text_add(out, ".Ss ");
    pw_roff_add(out, *map->map ? map->map : "The file");
    pw_text_add(out, "\n");
    if (map->help && *map->help) {
        pw_roff_add(out, map->help);
        pw_text_add(out, ".\n");
    }
    pw_text_add(out, ".Bl -tag -width Ds\n");
    for (int i = 0; i < pw_key_count; i++)
        if (!strcmp(pw_keys[i].map, map->map)) add_key(out, &pw_keys[i]);
    pw_text_add(out, ".El\n");
}

void pw_manual_write(pw_text *out)
{
    pw_text_add(out,
        ".\\\" SPDX-License-Identifier: GPL-3.0-or-later\n.Dd $Mdocdate$\n.Dt POLEWRIGHT-STAGE 5\n.Os\n"
        ".Sh NAME\n.Nm polewright-stage\n.Nd the description of an analog stage that polewright reads\n"
        ".Sh DESCRIPTION\nA stage file is one UTF\\-8 YAML document.\n"
        "It says what the analog stage is, at what rate its replacement runs, in what arithmetic,\n"
        "and what is asked of it.\n"
        "A quantity is a number, an SI prefix and a unit, with or without the space:\n"
        ".Ql 48 kHz , 1.6 nF , \\-5 krad/s .\n"
        "The codes of IEC 60062 stand for part values:\n.Ql 4k7 , 3n3 , R47 .\n"
        "A bare number is in hertz where a frequency stands, in rad/s among zeros and poles.\n"
        ".Sh KEYS\n");
    for (int i = 0; i < pw_key_map_count; i++) add_map(out, &pw_key_maps[i]);
    pw_text_add(out,
        ".Sh EXAMPLES\n.Bd -literal\nstage: keel_strain\nrate: 8 kHz\nanalog:\n"
        "  family: {approximation: butterworth, shape: lowpass, order: 4, corner: 120 Hz}\n"
        "arithmetic: {sample: q15, coefficient: 32 bits}\nlimits: {band: [1 Hz, 400 Hz], magnitude: 0.3 dB}\n"
        ".Ed\n.Sh SEE ALSO\n.Xr polewright 1\n");
}
