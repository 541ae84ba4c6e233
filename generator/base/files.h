/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Output files: composed in memory as a set, written beside their place, then renamed. */
#ifndef PW_BASE_FILES_H
#define PW_BASE_FILES_H

#include "base/text.h"

typedef struct pw_file { char *name; pw_text text; } pw_file;   /* name: relative, '/' allowed */
typedef struct pw_fileset { pw_file *list; int count; } pw_fileset;

/* A new empty file of this name at the end of the set; the pointer is good until the next call. */
pw_text *pw_fileset_add(pw_fileset *set, const char *name);
const pw_file *pw_fileset_find(const pw_fileset *set, const char *name);
void pw_fileset_free(pw_fileset *set);

/* Writes the set as the directory path. Everything is first written and synced in a directory
 * beside it; only when all of it stands is the old directory replaced: the files of this set
 * replace their namesakes and other files that were there stay. On failure the old directory is
 * as it was, a line on stderr says which file and why, and the status is PW_FAILED. */
PW_CHECKED pw_status pw_fileset_write(const pw_fileset *set, const char *directory);

/* One file, the same way. */
PW_CHECKED pw_status pw_file_write(const char *path, const void *bytes, size_t size);

/* The whole of a file ("-": standard input). most: bytes; larger is PW_WRONG. A line on stderr
 * says why on failure, PW_FAILED for what the system refuses, PW_WRONG where there is no such file. */
PW_CHECKED pw_status pw_file_read(const char *path, size_t most, pw_text *out);

/* The path of a shipped file ("runtime/pw_q31.c", "targets/host") in buffer, from the directory in
 * the environment variable POLEWRIGHT_DATA, or near the program, or where it was installed.
 * PW_FAILED with a line on stderr where it stands nowhere. */
PW_CHECKED pw_status pw_data_path(const char *name, char *buffer, size_t room);

#endif
