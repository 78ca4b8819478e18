/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/time_option.h"

#include <string.h>

#include "ingest/time_text.h"

enum rfade_status rfade_time_option(const struct rfade_command *command, const char *option,
                                    const char *text, int64_t *time_us,
                                    struct rfade_error *error)
{
    struct rfade_clock_time time;
    char midnight[40] = "";
    *time_us = 0;
    if (strlen(text) == strlen("2027-01-12"))
        (void)snprintf(midnight, sizeof midnight, "%sT00:00:00Z", text);
    const char *read = midnight[0] ? midnight : text;
    const char *reason = rfade_time_iso8601(read, strlen(read), &time);
    if (!reason && !time.has_date)
        reason = "there is no date";
    if (reason)
        return rfade_usage(
            error, command,
            "option --%s needs a time such as 2027-01-12T20:00:00Z, not '%s': %s", option, text,
            reason);
    *time_us =
        time.days * INT64_C(86400000000) + time.of_day_us - (int64_t)time.offset_s * 1000000;
    return RFADE_OK;
}
