/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What libyaml says about text that is not YAML, in words for someone who writes a stage file. */
#ifndef PW_STAGEFILE_TREE_FAULT_H
#define PW_STAGEFILE_TREE_FAULT_H

#include <yaml.h>
#include "base/messages.h"

/* One error for the parser's fault, at the place that helps most: every, where it is not {0, 0}. */
void pw_tree_tell_fault(const yaml_parser_t *parser, pw_where every, pw_messages *messages);

#endif
