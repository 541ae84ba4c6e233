/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "twin/record.h"

#include <errno.h>
#include <stdarg.h>
#include <stdio.h>
#include <string.h>
#include <sys/stat.h>

#include "stagefile/tree.h"

/* What a file holds may be anything: a terminal gets plain UTF-8. */
static void make_printable(char *text)
{
    pw_where at;
    bool whole = !pw_utf8_fault(text, strlen(text), &at);
    for (char *p = text; *p; p++)
        if ((unsigned char)*p < ' ' || *p == 127 || (!whole && (*p & 0x80))) *p = '?';
}

pw_status pw_record_wrong(const char *path, int64_t line, const char *format, ...)
{
    char text[1024];
    va_list args;
    va_start(args, format);
    vsnprintf(text, sizeof text, format, args);
    va_end(args);
    make_printable(text);
    if (line > 0) fprintf(stderr, "%s:%lld: ", path, (long long)line);
    else fprintf(stderr, "%s: ", path);
    fprintf(stderr, "%s\n", text);
    return PW_WRONG;
}

/* Whether the file begins as a WAV file does (RIFF, RF64); *status where it cannot be read. */
static bool is_wav(const char *path, double *size, pw_status *status)
{
    char head[12] = {0};
    struct stat info;
    FILE *f = fopen(path, "rb");
    *status = PW_OK;
    if (!f || fstat(fileno(f), &info) || S_ISDIR(info.st_mode)) {
        fprintf(stderr, "polewright: cannot read %s: %s\n", path, strerror(f ? EISDIR : errno));
        *status = !f && errno != ENOENT && errno != ENOTDIR ? PW_FAILED : PW_WRONG;
        if (f) fclose(f);
        return false;
    }
    *size = (double)info.st_size;
    bool wav = S_ISREG(info.st_mode) && fread(head, 1, sizeof head, f) == sizeof head
               && (!memcmp(head, "RIFF", 4) || !memcmp(head, "RF64", 4))
               && !memcmp(head + 8, "WAVE", 4);
    fclose(f);
    return wav;
}

pw_status pw_record_open(const char *path, pw_record_kind kind, double rate_hz, pw_record *out)
{
    pw_status status;
    *out = (pw_record){.path = path, .kind = kind, .rate_hz = rate_hz};
    out->wav = is_wav(path, &out->size, &status);
    if (status) return status;
    status = out->wav ? pw_wav_open(out) : pw_csv_open(out);
    if (status) pw_record_close(out);
    return status;
}

pw_status pw_record_read(pw_record *record, double *values, size_t most, size_t *got)
{
    *got = 0;
    return record->wav ? pw_wav_read(record, values, most, got)
                       : pw_csv_read(record, values, most, got);
}

void pw_record_close(pw_record *record)
{
    if (record->wav) pw_wav_close(record);
    else pw_csv_close(record);
    pw_arena_free(&record->arena);
}
