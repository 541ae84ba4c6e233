/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "base/status.h"

const char *pw_status_phrase(pw_status status)
{
    switch (status) {
    case PW_OK: return "done";
    case PW_NOT_MET: return "done, a limit is not met";
    case PW_WRONG: return "the command line or the stage file is wrong";
    case PW_FAILED: return "the work could not be done";
    }
    return "unknown status";
}
