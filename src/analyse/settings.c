/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analyse/settings.h"

/* Raise it with every change of the method that changes a result: it makes everything new. */
enum { METHOD_VERSION = 11 };

struct rfade_analysis_settings rfade_analysis_defaults(void)
{
    return (struct rfade_analysis_settings){
        .window_wavelengths = 40.0, /* Lee, "Estimate of local average power", 1985 */
        .block_wavelengths = 10.0,
        .gap_s = 30.0,
        .fix_gap_s = 30.0,
        .noise_margin_db = 0.0,
        .confidence = 0.95,
    };
}

void rfade_analysis_settings_fingerprint(const struct rfade_analysis_settings *settings,
                                         struct rfade_fingerprint_writer *writer)
{
    rfade_fingerprint_integer(writer, METHOD_VERSION);
    rfade_fingerprint_number(writer, settings->window_wavelengths);
    rfade_fingerprint_number(writer, settings->block_wavelengths);
    rfade_fingerprint_number(writer, settings->gap_s);
    rfade_fingerprint_number(writer, settings->fix_gap_s);
    rfade_fingerprint_number(writer, settings->noise_margin_db);
    rfade_fingerprint_number(writer, settings->confidence);
}
