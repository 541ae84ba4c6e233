/* SPDX-License-Identifier: GPL-3.0-or-later */
#define _GNU_SOURCE
#include <ctype.h>
#include <errno.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/nearest.h"
#include "twin/record.h"

enum { TIME = -2, IGNORED = -1 };

struct pw_csv {
    FILE *file;
    char delimiter;
    int fields;                  /* that the first line names */
    int target[PW_MAX_COLUMNS];  /* the delivered column of each, TIME or IGNORED */
    const char *field[PW_MAX_COLUMNS];
    int64_t line;
    double first_time, last_time;
    int64_t times;
    char text[PW_RECORD_LINE + 2];
};

/* ---- Lines ---- */

/* One line without its end into csv->text; its length, or -1 at the end of the file; *what where it
 * is no line of text. */
static long take_line(struct pw_csv *csv, const char **what)
{
    long n = 0;
    int c;
    while ((c = getc_unlocked(csv->file)) != EOF && c != '\n') {
        if (c == 0)
            *what = "holds bytes that are no text; expected lines of numbers (or a WAV file)";
        if (n == PW_RECORD_LINE)
            *what = "is longer than 65536 bytes; expected lines of numbers (or a WAV file)";
        if (*what) return n;
        csv->text[n++] = (char)c;
    }
    csv->text[n] = 0;
    return c == EOF && !n ? -1 : n;
}

/* The next line that is no comment and not blank; null at the end of the file. */
static char *next_line(pw_record *record, pw_status *status)
{
    struct pw_csv *csv = record->csv;
    const char *what = NULL;
    long n;
    *status = PW_OK;
    while ((n = take_line(csv, &what)) >= 0) {
        char *text = csv->text;
        csv->line++;
        record->done += (double)n + 1;
        if (what) {
            *status = pw_record_wrong(record->path, csv->line, "%s", what);
            return NULL;
        }
        while (n && (text[n - 1] == '\r' || text[n - 1] == ' ')) text[--n] = 0;
        if (csv->line == 1 && !strncmp(text, "\xEF\xBB\xBF", 3)) text += 3;
        while (*text == ' ') text++;
        if (*text && *text != '#') return text;
    }
    if (ferror(csv->file)) {
        fprintf(stderr, "polewright: cannot read %s: %s\n", record->path, strerror(errno));
        *status = PW_FAILED;
    }
    return NULL;
}

/* ---- The first line ---- */

static char *trimmed(char *text)
{
    while (*text == ' ' || *text == '"') text++;
    for (size_t n = strlen(text); n && (text[n - 1] == ' ' || text[n - 1] == '"'); n--)
        text[n - 1] = 0;
    for (char *p = text; *p; p++) *p = (char)tolower((unsigned char)*p);
    return text;
}

static pw_status name_fields(pw_record *record, char *line)
{
    struct pw_csv *csv = record->csv;
    csv->delimiter = strchr(line, ';') ? ';' : strchr(line, '\t') ? '\t' : ',';
    const char ends[] = {csv->delimiter, 0};
    for (char *name; (name = strsep(&line, ends));) {
        if (csv->fields == PW_MAX_COLUMNS)
            return pw_record_wrong(record->path, csv->line, "names more than %d columns",
                                   PW_MAX_COLUMNS);
        csv->field[csv->fields++] = pw_arena_copy(&record->arena, trimmed(name));
    }
    return PW_OK;
}

static int find_field(const struct pw_csv *csv, const char *name)
{
    for (int i = 0; i < csv->fields; i++)
        if (!strcmp(csv->field[i], name)) return i;
    return -1;
}

static pw_status missing(const pw_record *record, const char *name)
{
    const struct pw_csv *csv = record->csv;
    const char *near = pw_nearest(name, csv->field, csv->fields), *first = csv->field[0], *end;
    strtod(first, (char **)&end);
    if (*first && !*end)
        return pw_record_wrong(record->path, csv->line,
                               "the first line holds numbers; expected the names of the "
                               "columns, one of them '%s'",
                               name);
    return pw_record_wrong(record->path, csv->line, "no column is named '%s'%s%s%s; expected %s",
                           name, near ? " ('" : "", near ? near : "", near ? "' is near)" : "",
                           record->kind == PW_RECORD_RESPONSE ? "hz,db[,deg]"
                           : record->kind == PW_RECORD_PAIR   ? "input,output"
                                                              : "input, or several that begin so");
}

static void deliver(pw_record *record, int field)
{
    record->csv->target[field] = record->columns;
    record->name[record->columns++] = record->csv->field[field];
}

static pw_status choose_named(pw_record *record, const char *const *name, int needed, int n)
{
    for (int i = 0; i < n; i++) {
        int field = find_field(record->csv, name[i]);
        if (field >= 0) deliver(record, field);
        else if (i < needed) return missing(record, name[i]);
    }
    return PW_OK;
}

static pw_status choose(pw_record *record)
{
    static const char *const pair[] = {"input", "output"}, *const response[] = {"hz", "db", "deg"};
    struct pw_csv *csv = record->csv;
    for (int i = 0; i < csv->fields; i++) {
        csv->target[i] = IGNORED;
        for (int k = 0; k < i; k++)
            if (!strcmp(csv->field[i], csv->field[k]))
                return pw_record_wrong(record->path, csv->line,
                                       "two columns are named '%s'; expected each once",
                                       csv->field[i]);
    }
    int time = find_field(csv, "time");
    if (time >= 0 && record->rate_hz > 0) csv->target[time] = TIME;
    if (record->kind == PW_RECORD_PAIR) return choose_named(record, pair, 2, 2);
    if (record->kind == PW_RECORD_RESPONSE) return choose_named(record, response, 2, 3);
    for (int i = 0; i < csv->fields; i++)
        if (!strncmp(csv->field[i], "input", 5)) deliver(record, i);
    return record->columns ? PW_OK : missing(record, "input");
}

pw_status pw_csv_open(pw_record *record)
{
    pw_status status;
    struct pw_csv *csv = record->csv = pw_take(sizeof *csv);
    csv->line = 0;
    csv->fields = 0;
    csv->times = 0;
    csv->file = fopen(record->path, "rb");
    if (!csv->file) {
        fprintf(stderr, "polewright: cannot read %s: %s\n", record->path, strerror(errno));
        return PW_FAILED;
    }
    char *line = next_line(record, &status);
    if (status) return status;
    if (!line)
        return pw_record_wrong(record->path, 0,
                               "is empty; expected a line that names the columns, then numbers");
    status = name_fields(record, line);
    return status ? status : choose(record);
}

/* ---- Numbers ---- */

double pw_decimal(const char **at)
{
    static const double power[] = {1e0,  1e1,  1e2,  1e3,  1e4,  1e5,  1e6,  1e7,
                                   1e8,  1e9,  1e10, 1e11, 1e12, 1e13, 1e14, 1e15,
                                   1e16, 1e17, 1e18, 1e19, 1e20, 1e21, 1e22};
    const char *p = *at;
    while (*p == ' ' || *p == '\t') p++;
    const char *begin = p;
    bool minus = *p == '-';
    if (*p == '-' || *p == '+') p++;
    uint64_t digits = 0;
    int count = 0, scale = 0, places = 0;
    for (; isdigit((unsigned char)*p); p++, places++)
        if (digits || *p != '0') digits = digits * 10 + (uint64_t)(*p - '0'), count++;
    if (*p == '.')
        for (p++; isdigit((unsigned char)*p); p++, places++, scale--)
            if (digits || *p != '0') digits = digits * 10 + (uint64_t)(*p - '0'), count++;
    /* Clinger, "How to read floating point numbers accurately" (1990): both exact, one rounding. */
    if (places && count <= 15 && scale >= -22 && *p != 'e' && *p != 'E'
        && !isalpha((unsigned char)*p)) {
        *at = p;
        double value = (double)digits / power[-scale];
        return minus ? -value : value;
    }
    char *end;
    double value = strtod(begin, &end);
    if (end != begin) *at = end;
    return value;
}

static pw_status not_a_number(const pw_record *record, int field, const char *text)
{
    const struct pw_csv *csv = record->csv;
    int n = (int)strcspn(text, (const char[]){csv->delimiter, 0});
    const char *comma = csv->delimiter == ',' ? NULL : memchr(text, ',', (size_t)n);
    while (n && *text == ' ') text++, n--;
    if (!n)
        return pw_record_wrong(record->path, csv->line, "the %s is missing; expected a number",
                               csv->field[field]);
    return pw_record_wrong(record->path, csv->line, "the %s '%.*s' %s; expected %s",
                           csv->field[field], n > 40 ? 40 : n, text,
                           comma ? "has a decimal comma" : "is no finite number",
                           comma ? "a decimal point" : "a number such as 0.125");
}

static pw_status ragged(const pw_record *record, int fields, bool more)
{
    const struct pw_csv *csv = record->csv;
    bool commas = more && csv->delimiter == ',';
    return pw_record_wrong(record->path, csv->line,
                           "has %s%d field%s where %d columns are named; expected one number "
                           "for each%s",
                           more ? "more than " : "", fields, fields == 1 ? "" : "s", csv->fields,
                           commas ? " (with a decimal point: a comma divides columns)" : "");
}

static pw_status check_time(pw_record *record, double time)
{
    struct pw_csv *csv = record->csv;
    double step = 1 / record->rate_hz;
    if (csv->times++ == 0) csv->first_time = time;
    else {
        double expected = csv->first_time + (double)(csv->times - 1) * step,
               seen = time - csv->last_time;
        /* Printed times are rounded: to a quarter of a step, and half of one over the whole. */
        if (fabs(seen - step) > 0.25 * step || fabs(time - expected) > 0.5 * step)
            return pw_record_wrong(
                record->path, csv->line,
                "the time steps by %.6g s (by %.9g s on average), the stage's "
                "rate of %.9g Hz by %.9g s; expected a record at the stage's rate, evenly spaced",
                seen, (time - csv->first_time) / (double)(csv->times - 1), record->rate_hz, step);
    }
    csv->last_time = time;
    return PW_OK;
}

static pw_status read_frame(pw_record *record, const char *at, double *values)
{
    struct pw_csv *csv = record->csv;
    for (int i = 0; i < csv->fields; i++) {
        const char *text = at;
        if (csv->target[i] == IGNORED) {
            while (*at && *at != csv->delimiter) at++;
        } else {
            double value = pw_decimal(&at);
            while (*at == ' ') at++;
            if (at == text || (*at && *at != csv->delimiter) || !isfinite(value))
                return not_a_number(record, i, text);
            if (csv->target[i] >= 0) values[csv->target[i]] = value;
            else {
                pw_status status = check_time(record, value);
                if (status) return status;
            }
        }
        if (i + 1 < csv->fields && *at++ != csv->delimiter) return ragged(record, i + 1, false);
    }
    return *at ? ragged(record, csv->fields, true) : PW_OK;
}

pw_status pw_csv_read(pw_record *record, double *values, size_t most, size_t *got)
{
    pw_status status = PW_OK;
    while (*got < most) {
        const char *line = next_line(record, &status);
        if (!line || status) return status;
        status = read_frame(record, line, values + *got * (size_t)record->columns);
        if (status) return status;
        ++*got;
        record->frames++;
    }
    return status;
}

void pw_csv_close(pw_record *record)
{
    if (!record->csv) return;
    if (record->csv->file) fclose(record->csv->file);
    free(record->csv);
    record->csv = NULL;
}
