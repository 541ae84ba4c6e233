/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <sndfile.h>

#include "twin/record.h"

static bool is_readable(int format)
{
    int sub = format & SF_FORMAT_SUBMASK;
    return sub == SF_FORMAT_PCM_16 || sub == SF_FORMAT_PCM_24 || sub == SF_FORMAT_PCM_32
           || sub == SF_FORMAT_FLOAT || sub == SF_FORMAT_DOUBLE;
}

static pw_status check(const pw_record *record, const SF_INFO *info)
{
    if (!is_readable(info->format))
        return pw_record_wrong(record->path, 0,
                               "is in a coding that is not read here; expected 16-, 24- or 32-bit "
                               "PCM or float");
    if (record->kind == PW_RECORD_RESPONSE)
        return pw_record_wrong(record->path, 0,
                               "is a sound file; expected text with the columns hz,db[,deg]");
    if (record->kind == PW_RECORD_PAIR && info->channels != 2)
        return pw_record_wrong(record->path, 0,
                               "has %d channel%s; expected two, the input and the output",
                               info->channels, info->channels == 1 ? "" : "s");
    if (info->channels > PW_MAX_COLUMNS)
        return pw_record_wrong(record->path, 0, "has %d channels; expected up to %d",
                               info->channels, PW_MAX_COLUMNS);
    if (record->rate_hz > 0 && fabs(info->samplerate - record->rate_hz) > 0.5)
        return pw_record_wrong(
            record->path, 0,
            "is at %d Hz, the stage at %.9g Hz; expected a record at the stage's "
            "rate (or --set rate=%d)",
            info->samplerate, record->rate_hz, info->samplerate);
    return PW_OK;
}

pw_status pw_wav_open(pw_record *record)
{
    static const char *const pair[] = {"input", "output"};
    SF_INFO info = {0};
    SNDFILE *sound = sf_open(record->path, SFM_READ, &info);
    if (!sound)
        return pw_record_wrong(record->path, 0, "is no sound file that can be read: %s",
                               sf_strerror(NULL));
    record->sound = sound;
    record->columns = info.channels;
    record->size = (double)info.frames;
    pw_status status = check(record, &info);
    for (int i = 0; i < info.channels && !status; i++)
        record->name[i] = record->kind == PW_RECORD_PAIR ? pair[i]
                          : info.channels == 1           ? "input"
                                               : pw_arena_print(&record->arena, "input%d", i + 1);
    return status;
}

pw_status pw_wav_read(pw_record *record, double *values, size_t most, size_t *got)
{
    sf_count_t n = sf_readf_double(record->sound, values, (sf_count_t)most);
    *got = n > 0 ? (size_t)n : 0;
    for (size_t i = 0; i < *got * (size_t)record->columns; i++)
        if (!isfinite(values[i]))
            return pw_record_wrong(record->path, 0, "sample %lld is not finite; expected numbers",
                                   (long long)record->frames
                                       + (long long)(i / (size_t)record->columns));
    record->frames += (int64_t)*got;
    record->done += (double)*got;
    return PW_OK;
}

void pw_wav_close(pw_record *record)
{
    if (record->sound) sf_close(record->sound);
    record->sound = NULL;
}
