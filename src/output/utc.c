/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "output/utc.h"

#include <stdio.h>
#include <time.h>

void rfade_utc_text(int64_t time_us, char text[RFADE_UTC_SIZE])
{
    int fraction_us = (int)(time_us % 1000000);
    int64_t second = time_us / 1000000;
    if (fraction_us < 0) { /* before 1970 */
        fraction_us += 1000000;
        second--;
    }
    time_t seconds = (time_t)second;
    struct tm parts;
    char stamp[RFADE_UTC_SIZE];
    if (!gmtime_r(&seconds, &parts) ||
        strftime(stamp, sizeof stamp, "%Y-%m-%dT%H:%M:%S", &parts) == 0)
        (void)snprintf(text, RFADE_UTC_SIZE, "%lld us", (long long)time_us);
    else if (fraction_us)
        (void)snprintf(text, RFADE_UTC_SIZE, "%.28s.%06dZ", stamp, fraction_us);
    else
        (void)snprintf(text, RFADE_UTC_SIZE, "%.28sZ", stamp);
}
