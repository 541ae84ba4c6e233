/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "stagefile/stage_name.h"

#include <ctype.h>
#include <string.h>

/* C11, C++20 and the alternative spellings of C++. */
const char *const pw_stage_name_words[] = {
    "alignas", "alignof", "and", "and_eq", "asm", "auto", "bitand", "bitor", "bool", "break",
    "case", "catch", "char", "char16_t", "char32_t", "char8_t", "class", "co_await", "co_return",
    "co_yield", "compl", "concept", "const", "const_cast", "consteval", "constexpr", "constinit",
    "continue", "decltype", "default", "delete", "do", "double", "dynamic_cast", "else", "enum",
    "explicit", "export", "extern", "false", "float", "for", "friend", "goto", "if", "inline",
    "int", "long", "main", "mutable", "namespace", "new", "noexcept", "not", "not_eq", "nullptr",
    "operator", "or", "or_eq", "private", "protected", "public", "register", "reinterpret_cast",
    "requires", "restrict", "return", "short", "signed", "sizeof", "static", "static_assert",
    "static_cast", "struct", "switch", "template", "this", "thread_local", "throw", "true", "try",
    "typedef", "typeid", "typename", "typeof", "union", "unsigned", "using", "virtual", "void",
    "volatile", "wchar_t", "while", "xor", "xor_eq", NULL,
};

/* The same as pw_stage_name_fault, but for the words. */
const char pw_stage_name_pattern[] = "^(?!pw_)(?!.*__)[A-Za-z][A-Za-z0-9_]{0,47}$";

const char *pw_stage_name_fault(const char *text)
{
    for (const char *p = text; *p; p++)
        if (!isalnum((unsigned char)*p) && *p != '_') return "is not a C identifier";
    if (isdigit((unsigned char)text[0]) || !*text) return "is not a C identifier";
    if (text[0] == '_') return "begins with '_', which C keeps for itself";
    if (strstr(text, "__")) return "holds '__', which C++ keeps for itself";
    if (!strncmp(text, "pw_", 3)) return "begins with 'pw_', which the runtime uses";
    if (strlen(text) > PW_STAGE_NAME_LONGEST) return "is longer than 48 letters";
    for (const char *const *word = pw_stage_name_words; *word; word++)
        if (!strcmp(text, *word)) return "is a word of C or C++";
    return NULL;
}
