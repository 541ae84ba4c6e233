/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "stagefile/tree_fault.h"

#include <string.h>

typedef struct phrase {
    const char *context, *problem;   /* how libyaml's begin; null: any */
    bool at_context;                 /* the fault is where the construct began */
    const char *says;
} phrase;

/* The first row that fits is taken. */
static const phrase phrases[] = {
    {"while scanning a quoted scalar", "found unexpected end of stream", true,
     "this quote is not closed; expected the same quote again"},
    {"while scanning a quoted scalar", "found unexpected document indicator", true,
     "this quote is not closed; expected the same quote again"},
    {"while parsing a quoted scalar", "found unknown escape character", false,
     "an escape that YAML does not know; expected \\\\ for a backslash, or single quotes around "
     "the text"},
    {"while parsing a quoted scalar", NULL, false,
     "an escape that is not finished; expected hexadecimal digits, or single quotes around the "
     "text"},
    {"while parsing a flow sequence", NULL, true,
     "this [ is not closed where it should be; expected items divided by ',' and a ']'"},
    {"while parsing a flow mapping", NULL, true,
     "this { is not closed where it should be; expected 'key: value' pairs divided by ',' and a "
     "'}'"},
    {NULL, "mapping values are not allowed in this context", false,
     "a ':' where no key can stand; expected one 'key: value' a line, each key as far in as its "
     "neighbours, or quotes around the text"},
    {"while scanning a simple key", NULL, true, 
     "a key without its ':'; expected 'key: value', with a space after the ':'"},
    {"while parsing a block mapping", NULL, false,
     "this line is not a key of the map before it; expected 'key: value', as far in as its "
     "neighbours"},
    {"while parsing a block collection", NULL, false,
     "this line is not an item of the list before it; expected '- ', as far in as its neighbours"},
    {NULL, "block sequence entries are not allowed in this context", false,
     "a '- ' where no list item can stand; expected the list on lines of its own, or in [ ]"},
    {"while scanning for the next token", "found character that cannot start any token", false,
     "a character that cannot begin a value (@, ` and % need quotes); expected quotes around the "
     "text"},
    {"while scanning a block scalar", "found a tab character", false,
     "a tab where spaces indent; expected spaces"},
    {"while scanning an alias", NULL, false,
     "an alias without a name; expected *name, or quotes around the text"},
    {"while scanning an anchor", NULL, false,
     "an anchor without a name; expected &name, or quotes around the text"},
    {"while parsing a node", "found undefined tag handle", false,
     "a tag that is not declared; expected no tag, or quotes around the text"},
    {"while scanning a tag", NULL, false,
     "a tag that is not finished; expected no tag, or quotes around the text"},
    {NULL, "did not find expected <document start>", false,
     "text after the end of the document; expected one map of keys, as far in as its neighbours"},
};

static bool begins(const char *text, const char *start)
{
    return !start || (text && !strncmp(text, start, strlen(start)));
}

/* libyaml calls a tab that indents a character like another. */
static bool is_tab(const yaml_parser_t *parser, const char *problem)
{
    return begins(problem, "found character that cannot start any token")
           && parser->buffer.pointer < parser->buffer.last && *parser->buffer.pointer == '\t';
}

void pw_tree_tell_fault(const yaml_parser_t *parser, pw_where every, pw_messages *messages)
{
    const char *problem = parser->problem ? parser->problem : "it cannot be read";
    if (is_tab(parser, problem)) {
        pw_where tab = {(int)parser->problem_mark.line + 1, (int)parser->problem_mark.column + 1};
        pw_error(messages, every.line ? every : tab, "a tab where spaces indent; expected spaces");
        return;
    }
    for (size_t i = 0; i < sizeof phrases / sizeof phrases[0]; i++) {
        const phrase *p = &phrases[i];
        if (!begins(parser->context, p->context) || !begins(problem, p->problem)) continue;
        yaml_mark_t mark = p->at_context ? parser->context_mark : parser->problem_mark;
        pw_where at = {(int)mark.line + 1, (int)mark.column + 1};
        pw_error(messages, every.line ? every : at, "%s", p->says);
        return;
    }
    pw_where at = {(int)parser->problem_mark.line + 1, (int)parser->problem_mark.column + 1};
    pw_error(messages, every.line ? every : at, "this is not YAML: %s; expected 'key: value' lines",
             problem);
}
