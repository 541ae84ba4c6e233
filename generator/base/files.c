/* SPDX-License-Identifier: GPL-3.0-or-later */
#define _GNU_SOURCE
#include "base/files.h"

#include <errno.h>
#include <fcntl.h>
#include <limits.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

#include "base/arena.h"

#ifndef PW_PREFIX
#define PW_PREFIX "/usr/local"
#endif

pw_text *pw_fileset_add(pw_fileset *set, const char *name)
{
    set->list = pw_retake(set->list, (size_t)(set->count + 1) * sizeof *set->list);
    char *copy = pw_take(strlen(name) + 1);
    strcpy(copy, name);
    set->list[set->count] = (pw_file){copy, {0}};
    return &set->list[set->count++].text;
}

const pw_file *pw_fileset_find(const pw_fileset *set, const char *name)
{
    for (int i = 0; i < set->count; i++)
        if (!strcmp(set->list[i].name, name)) return &set->list[i];
    return NULL;
}

void pw_fileset_free(pw_fileset *set)
{
    for (int i = 0; i < set->count; i++) {
        free(set->list[i].name);
        pw_text_free(&set->list[i].text);
    }
    free(set->list);
    *set = (pw_fileset){0};
}

static pw_status cannot(const char *do_what, const char *path)
{
    fprintf(stderr, "polewright: cannot %s %s: %s\n", do_what, path, strerror(errno));
    return PW_FAILED;
}

static pw_status write_all(const char *path, const void *bytes, size_t size)
{
    int fd = open(path, O_WRONLY | O_CREAT | O_TRUNC | O_CLOEXEC, 0666);
    if (fd < 0) return cannot("write", path);
    const char *p = bytes;
    while (size) {
        ssize_t n = write(fd, p, size);
        if (n < 0 && errno == EINTR) continue;
        if (n <= 0) {
            pw_status status = cannot("write", path);
            close(fd);
            return status;
        }
        p += n;
        size -= (size_t)n;
    }
    if (close(fd)) return cannot("write", path);
    return PW_OK;
}

pw_status pw_file_write(const char *path, const void *bytes, size_t size)
{
    char beside[PATH_MAX];
    if (snprintf(beside, sizeof beside, "%s.new-%ld", path, (long)getpid()) >= (int)sizeof beside) {
        errno = ENAMETOOLONG;
        return cannot("write", path);
    }
    pw_status status = write_all(beside, bytes, size);
    if (!status && rename(beside, path)) status = cannot("rename into", path);
    if (status) unlink(beside);
    return status;
}

/* Makes every directory on the way to path (the last name excluded). */
static pw_status make_parents(char *path)
{
    for (char *p = path + 1; *p; p++) {
        if (*p != '/') continue;
        *p = 0;
        int failed = mkdir(path, 0777) && errno != EEXIST;
        if (failed) {
            pw_status status = cannot("make the directory", path);
            *p = '/';
            return status;
        }
        *p = '/';
    }
    return PW_OK;
}

static pw_status join(char *buffer, const char *directory, const char *name)
{
    if (snprintf(buffer, PATH_MAX, "%s/%s", directory, name) < PATH_MAX) return PW_OK;
    errno = ENAMETOOLONG;
    return cannot("write", name);
}

static void remove_beside(const pw_fileset *set, const char *beside)
{
    char path[PATH_MAX];
    for (int i = 0; i < set->count; i++) {
        if (join(path, beside, set->list[i].name)) continue;
        unlink(path);
        for (char *cut; (cut = strrchr(path, '/')) && (size_t)(cut - path) > strlen(beside);) {
            *cut = 0;
            rmdir(path);
        }
    }
    rmdir(beside);
}

static pw_status write_beside(const pw_fileset *set, const char *beside)
{
    char path[PATH_MAX];
    for (int i = 0; i < set->count; i++) {
        pw_status status = join(path, beside, set->list[i].name);
        if (!status) status = make_parents(path);
        if (!status)
            status = write_all(path, pw_text_string(&set->list[i].text), set->list[i].text.size);
        if (status) return status;
    }
    return PW_OK;
}

/* Whether a directory stands where a file of the set must go: looked at before anything is made. */
static pw_status look_for_directories(const pw_fileset *set, const char *directory)
{
    char to[PATH_MAX];
    struct stat info;
    for (int i = 0; i < set->count; i++) {
        pw_status status = join(to, directory, set->list[i].name);
        if (status) return status;
        if (!stat(to, &info) && S_ISDIR(info.st_mode)) {
            errno = EISDIR;
            return cannot("write", to);
        }
    }
    return PW_OK;
}

/* Folders first, so that what remains to fail during the renames is the system itself. */
static pw_status rename_into(const pw_fileset *set, const char *beside, const char *directory)
{
    char from[PATH_MAX], to[PATH_MAX];
    for (int i = 0; i < set->count; i++) {
        pw_status status = join(to, directory, set->list[i].name);
        if (!status) status = make_parents(to);
        if (status) return status;
    }
    for (int i = 0; i < set->count; i++) {
        if (join(from, beside, set->list[i].name) || join(to, directory, set->list[i].name))
            return PW_FAILED;
        if (rename(from, to)) return cannot("rename into", to);
    }
    return PW_OK;
}

pw_status pw_fileset_write(const pw_fileset *set, const char *directory)
{
    char beside[PATH_MAX], target[PATH_MAX];
    size_t n = strlen(directory);
    while (n > 1 && directory[n - 1] == '/') n--;
    if (snprintf(target, sizeof target, "%.*s/", (int)n, directory) >= (int)sizeof target
        || snprintf(beside, sizeof beside, "%.*s.new-%ld", (int)n, directory, (long)getpid())
               >= (int)sizeof beside) {
        errno = ENAMETOOLONG;
        return cannot("write", directory);
    }
    pw_status status = make_parents(target);
    if (status) return status;
    target[strlen(target) - 1] = 0;
    struct stat info;
    if (!stat(target, &info) && S_ISDIR(info.st_mode) && access(target, W_OK | X_OK))
        return cannot("write into", target);
    status = look_for_directories(set, target);
    if (status) return status;
    if (mkdir(beside, 0777)) return cannot("make the directory", beside);
    status = write_beside(set, beside);
    if (!status) status = rename_into(set, beside, target);
    remove_beside(set, beside);
    return status;
}

pw_status pw_file_read(const char *path, size_t most, pw_text *out)
{
    FILE *f = strcmp(path, "-") ? fopen(path, "rb") : stdin;
    if (!f) {
        fprintf(stderr, "polewright: cannot read %s: %s\n", path, strerror(errno));
        return errno == ENOENT || errno == ENOTDIR ? PW_WRONG : PW_FAILED;
    }
    pw_status status = PW_OK;
    char chunk[16384];
    size_t n;
    while ((n = fread(chunk, 1, sizeof chunk, f)) > 0) {
        pw_text_add_bytes(out, chunk, n);
        if (out->size > most) {
            fprintf(stderr, "polewright: %s is larger than %zu bytes\n", path, most);
            status = PW_WRONG;
            break;
        }
    }
    if (!status && ferror(f)) status = cannot("read", path);
    if (f != stdin) fclose(f);
    return status;
}

static int stands(const char *root, const char *name, char *buffer, size_t room)
{
    return snprintf(buffer, room, "%s/%s", root, name) < (int)room && !access(buffer, R_OK);
}

pw_status pw_data_path(const char *name, char *buffer, size_t room)
{
    static const char *const near[] = {"/../share/polewright", "/..", "/../..", "/../../.."};
    /* For where /proc does not tell where the program stands. */
    static const char *const installed[] = {PW_PREFIX "/share/polewright", "/usr/share/polewright"};
    const char *told = getenv("POLEWRIGHT_DATA");
    if (told && *told && stands(told, name, buffer, room)) return PW_OK;
    char self[PATH_MAX];
    ssize_t n = readlink("/proc/self/exe", self, sizeof self - 32);
    if (n > 0) {
        self[n] = 0;
        char *cut = strrchr(self, '/');
        for (size_t i = 0; cut && i < sizeof near / sizeof near[0]; i++) {
            strcpy(cut, near[i]);
            if (stands(self, name, buffer, room)) return PW_OK;
        }
    }
    for (size_t i = 0; i < sizeof installed / sizeof installed[0]; i++)
        if (stands(installed[i], name, buffer, room)) return PW_OK;
    fprintf(stderr, "polewright: the shipped file %s is not found; set POLEWRIGHT_DATA to the "
                    "directory that holds runtime/ and targets/\n", name);
    return PW_FAILED;
}
