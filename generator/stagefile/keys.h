/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The one table of the keys of a stage file. The reader's dispatch, its messages, the JSON Schema
 * and the manual page are all made from it. */
#ifndef PW_STAGEFILE_KEYS_H
#define PW_STAGEFILE_KEYS_H

#include <stdbool.h>
#include <stddef.h>

#include "base/text.h"
#include "stagefile/quantity.h"
#include "stagefile/tree.h"

struct pw_reader;

/* A word that a value may be, and what it means. Lists of words end with a null word; where a word
 * is stored as an enumeration its index is the value. */
typedef struct pw_word { const char *word, *help; } pw_word;

/* The forms that a value may take, together. */
typedef enum pw_form {
    PW_FORM_WORD = 1,            /* one of words */
    PW_FORM_QUANTITY = 2,        /* of dimension, within range */
    PW_FORM_COUNT = 4,           /* a whole number, low to high */
    PW_FORM_TEXT = 8,            /* free text, or a name */
    PW_FORM_FLAG = 16,           /* true or false */
    PW_FORM_MAP = 32,            /* a map of the keys of sub */
    PW_FORM_LIST = 64,           /* a list, least to most items, each of one of item_forms */
    PW_FORM_NAMED = 128,         /* a map of free names, each a map of the keys of sub */
    PW_FORM_PAIR_TEXT = 256,     /* "-222 ± 333j" */
} pw_form;

typedef enum pw_range {
    PW_RANGE_ANY, PW_RANGE_POSITIVE, PW_RANGE_NOT_NEGATIVE, PW_RANGE_NOT_ZERO
} pw_range;

typedef struct pw_key pw_key;
typedef void pw_taker(struct pw_reader *reader, const pw_key *key, const pw_tree *node, void *base);

struct pw_key {
    const char *map;             /* the map it stands in: "": the file; "limits", "part" */
    const char *name;
    unsigned forms, item_forms;
    int least, most;             /* items of a list */
    pw_dimension dimension;      /* of quantities */
    pw_range range;
    double low, high;            /* counts: both included; quantities: high included, 0: none */
    const pw_word *words;
    const char *sub;
    const char *text;            /* what a text is: "a node"; null: "a text" */
    bool needed;                 /* there is no default */
    int choice;                  /* 1, 2: of the keys of this map with the same number exactly one
                                    stands; 0: no such bond */
    const char *only_with;       /* "a|b": beside key a or b only; "key=x|y": where key says x or y;
                                    null: always. A choice counts only where this holds. */
    const char *needed_with;     /* the same, where the key must stand; null: nowhere */
    const char *fallback;        /* the default, as if it stood in the file; null: none */
    const char *otherwise;       /* the default in words, where a later step fills it in; or null */
    const char *help;            /* one line, no full stop */
    const char *example;         /* YAML; of a list: the whole list */
    const char *item_example;    /* of a list's item; null: a sample of its dimension */
    pw_taker *take;              /* stores the value in the struct of its map .. */
    size_t offset, at;           /* .. here, and its place there (0: nowhere) */
};

typedef struct pw_key_map {
    const char *map, *help;
    bool free_names;             /* other keys than the table's may stand in it, see pw_cell */
    bool stated;                 /* the report states the defaults of its keys that were taken */
} pw_key_map;

extern const pw_key pw_keys[];
extern const int pw_key_count;
extern const pw_key_map pw_key_maps[];
extern const int pw_key_map_count;

const pw_key *pw_key_find(const char *map, const char *name);

/* True for a key (word null) or a word that is planned and does not work yet: it is refused plainly
 * and stands in no help. */
bool pw_key_later(const char *map, const char *name, const char *word);

/* A key as messages name it: "limits.band"; "rate" in the file itself. */
#define PW_KEY_ROOM 96
char *pw_key_path(char *buffer, const pw_key *key);

/* What a key's value must be: "a frequency such as 8 kHz", "one of l1, linf, l2, none". */
void pw_key_expected(const pw_key *key, pw_text *out);

/* A key that stands for one item of the list that a key is. */
pw_key pw_key_item(const pw_key *list);

/* ---- words, in the order of their enumerations in stage.h ---- */

extern const pw_word pw_method_words[], pw_prewarp_words[], pw_infinity_words[], pw_sample_words[],
    pw_structure_words[], pw_scaling_words[], pw_signal_words[], pw_approximation_words[],
    pw_shape_words[], pw_normalise_words[], pw_rounding_words[], pw_overflow_words[],
    pw_section_order_words[], pw_code_words[], pw_forbidden_words[], pw_series_words[],
    pw_distribution_words[], pw_op_amp_words[], pw_q_words[], pw_flag_words[];

#endif
