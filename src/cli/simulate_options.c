/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/simulate_options.h"

#include <math.h>
#include <string.h>

const struct simulate_options rfade_simulate_defaults = {
    .seed = 1,
    .length_m = NAN,
    .carrier_hz = 457e6,
    .speed_kmh = 36,
    .rate_hz = 100,
    .stretch_m = 100,
    .ray_angle_deg = 90,
    .mean_level_dbm = -85,
    .shadowing_db = 4,
    .decorrelation_m = 60,
    .shadowing = "smooth",
    .step_db = 1,
    .floor_dbm = NAN,
    .ceiling_dbm = NAN,
    .noise_dbm = NAN,
    .standstill_s = 30,
    .position_scatter_m = 0,
    .fix_interval_s = 1,
    .start = "2027-01-12T20:00:00Z",
    .layout = "comma",
    .zone_minutes = 60,
    .vehicle = "spreader-1",
    .channel = "main",
    .second_carrier_hz = NAN,
    .second_mean_level_dbm = NAN,
};

static const char *shadowing_name(size_t index)
{
    static const char *const names[] = {"smooth", "exponential"};
    return index < sizeof names / sizeof names[0] ? names[index] : NULL;
}

/* In the order of enum rfade_log_layout. */
static const char *layout_name(size_t index)
{
    static const char *const names[] = {"comma", "semicolon", "blanks"};
    return index < sizeof names / sizeof names[0] ? names[index] : NULL;
}

#define TARGET(member) offsetof(struct simulate_options, member)

const struct rfade_option rfade_simulate_option_table[] = {
    {"length-m", "M", RFADE_OPTION_NUMBER, TARGET(length_m), 1e-3, 1e9, NULL,
     "length of the drive, default: that of --route, else 1000"},
    {"carrier-hz", "HZ", RFADE_OPTION_NUMBER, TARGET(carrier_hz), 1e5, 3e11, NULL,
     "carrier frequency, default 457e6"},
    {"speed-kmh", "V", RFADE_OPTION_NUMBER, TARGET(speed_kmh), 0.0036, 3.6e5, NULL,
     "speed between standstills, default 36"},
    {"rate-hz", "HZ", RFADE_OPTION_NUMBER, TARGET(rate_hz), 1e-6, 1e9, NULL,
     "readings a second, default 100"},
    {"k", "LIST", RFADE_OPTION_NUMBERS, TARGET(k), 0, 1e9, NULL,
     "Rice K (linear) by stretch, repeated in turn, for instance 0,1,4,10, default 0: "
     "Rayleigh"},
    {"stretch-m", "M", RFADE_OPTION_NUMBER, TARGET(stretch_m), 1e-3, 1e9, NULL,
     "length over which one K holds, default 100"},
    {"ray-angle-deg", "DEG", RFADE_OPTION_NUMBER, TARGET(ray_angle_deg), -360, 360, NULL,
     "direct ray against the road: 90 broadside, 0 along it, default 90"},
    {"mean-level-dbm", "DBM", RFADE_OPTION_NUMBER, TARGET(mean_level_dbm), -300, 100, NULL,
     "dB-median of the local mean power, default -85"},
    {"shadowing-db", "DB", RFADE_OPTION_NUMBER, TARGET(shadowing_db), 0, 30, NULL,
     "standard deviation of the local mean, default 4"},
    {"decorrelation-m", "M", RFADE_OPTION_NUMBER, TARGET(decorrelation_m), 1e-3, 1e9, NULL,
     "distance over which the local mean's correlation falls to 1/e, default 60"},
    {"shadowing", "SHAPE", RFADE_OPTION_CHOICE, TARGET(shadowing), 0, 0, shadowing_name,
     "the local mean's correlation over distance, smooth if not told"},
    {"step-db", "DB", RFADE_OPTION_NUMBER, TARGET(step_db), 0, 20, NULL,
     "the receiver rounds to multiples of this; 0 not at all, default 1"},
    {"floor-dbm", "DBM", RFADE_OPTION_NUMBER, TARGET(floor_dbm), -300, 100, NULL,
     "lower levels are reported as this one, default: no floor"},
    {"ceiling-dbm", "DBM", RFADE_OPTION_NUMBER, TARGET(ceiling_dbm), -300, 100, NULL,
     "higher levels are reported as this one, default: no ceiling"},
    {"noise-dbm", "DBM", RFADE_OPTION_NUMBER, TARGET(noise_dbm), -300, 100, NULL,
     "the comma layout gets a column of SNR: level less this noise"},
    {"standstill-at-m", "LIST", RFADE_OPTION_NUMBERS, TARGET(standstill_at_m), 0, 1e9, NULL,
     "places where the vehicle stands, in rising order"},
    {"standstill-s", "S", RFADE_OPTION_NUMBER, TARGET(standstill_s), 0, 1e6, NULL,
     "how long it stands at each, default 30"},
    {"position-scatter-m", "M", RFADE_OPTION_NUMBER, TARGET(position_scatter_m), 0, 1000, NULL,
     "standard deviation of a position, north and east each, default 0"},
    {"fix-interval-s", "S", RFADE_OPTION_NUMBER, TARGET(fix_interval_s), 1e-3, 1e6, NULL,
     "a new position so often, default 1"},
    {"seed", "N", RFADE_OPTION_INTEGER, TARGET(seed), 1, 4294967295, NULL,
     "the same seed and settings give the same digits, default 1"},
    {"route", "FILE", RFADE_OPTION_TEXT, TARGET(route), 0, 0, NULL,
     "drives along this line (GeoJSON LineString or text); else straight on over open sea"},
    {"start", "TIME", RFADE_OPTION_TEXT, TARGET(start), 0, 0, NULL,
     "time of the first reading, default 2027-01-12T20:00:00Z"},
    {"layout", "NAME", RFADE_OPTION_CHOICE, TARGET(layout), 0, 0, layout_name,
     "how the log's columns are laid out, comma if not told"},
    {"zone-minutes", "N", RFADE_OPTION_INTEGER, TARGET(zone_minutes), -840, 840, NULL,
     "local time of the semicolon layout, minutes east of UTC, default 60"},
    {"vehicle", "NAME", RFADE_OPTION_TEXT, TARGET(vehicle), 0, 0, NULL,
     "name in the log's vehicle column, default spreader-1"},
    {"channel", "NAME", RFADE_OPTION_TEXT, TARGET(channel), 0, 0, NULL,
     "name of the channel, default main"},
    {"second-channel", "NAME", RFADE_OPTION_TEXT, TARGET(second_channel), 0, 0, NULL,
     "a second channel in each row of the blanks layout, fading by itself"},
    {"second-carrier-hz", "HZ", RFADE_OPTION_NUMBER, TARGET(second_carrier_hz), 1e5, 3e11, NULL,
     "its carrier frequency, default: that of the first"},
    {"second-mean-level-dbm", "DBM", RFADE_OPTION_NUMBER, TARGET(second_mean_level_dbm), -300,
     100, NULL, "its median level, default: that of the first"},
    {"output", "FILE", RFADE_OPTION_TEXT, TARGET(output), 0, 0, NULL,
     "a new file for the log; standard output if not told"},
    {"truth", "FILE", RFADE_OPTION_TEXT, TARGET(truth), 0, 0, NULL,
     "a new CSV file for the true power, local mean and K of the (first) channel by reading"},
};

_Static_assert(sizeof rfade_simulate_option_table / sizeof rfade_simulate_option_table[0] ==
                   RFADE_SIMULATE_OPTIONS,
               "the table has as many options as the header says");

struct rfade_drive_settings rfade_simulate_settings(const struct simulate_options *given)
{
    static const double rayleigh_k = 0;
    bool exponential = strcmp(given->shadowing, "exponential") == 0;
    return (struct rfade_drive_settings){
        .seed = (uint64_t)given->seed,
        .length_m = given->length_m,
        .carrier_hz = given->carrier_hz,
        .speed_m_s = given->speed_kmh / 3.6,
        .rate_hz = given->rate_hz,
        .k = given->k.count ? given->k.items : &rayleigh_k,
        .k_count = given->k.count ? given->k.count : 1,
        .stretch_m = given->stretch_m,
        .ray_angle_deg = given->ray_angle_deg,
        .mean_level_dbm = given->mean_level_dbm,
        .shadowing_db = given->shadowing_db,
        .decorrelation_m = given->decorrelation_m,
        .shadowing = exponential ? RFADE_SHADOWING_EXPONENTIAL : RFADE_SHADOWING_SMOOTH,
        .step_db = given->step_db,
        .floor_dbm = given->floor_dbm,
        .ceiling_dbm = given->ceiling_dbm,
        .standstill_at_m = given->standstill_at_m.items,
        .standstill_count = given->standstill_at_m.count,
        .standstill_s = given->standstill_s,
    };
}

struct rfade_drive_settings rfade_simulate_second_settings(const struct simulate_options *given)
{
    struct rfade_drive_settings settings = rfade_simulate_settings(given);
    settings.seed = (settings.seed + 0x9E3779B9u) & 0xFFFFFFFFu;
    if (settings.seed == 0)
        settings.seed = 1;
    if (!isnan(given->second_carrier_hz))
        settings.carrier_hz = given->second_carrier_hz;
    if (!isnan(given->second_mean_level_dbm))
        settings.mean_level_dbm = given->second_mean_level_dbm;
    return settings;
}

enum rfade_log_layout rfade_simulate_layout(const struct simulate_options *given)
{
    size_t index = 0;
    while (strcmp(layout_name(index), given->layout) != 0)
        index++;
    return (enum rfade_log_layout)index;
}

enum rfade_status rfade_simulate_options_check(const struct simulate_options *given,
                                               struct rfade_error *error)
{
    const struct rfade_command *command = &rfade_command_simulate;
    bool blanks = rfade_simulate_layout(given) == RFADE_LAYOUT_BLANKS;
    if (given->second_channel && !blanks)
        return rfade_usage(error, command, "--second-channel needs --layout blanks");
    if (!isnan(given->noise_dbm) && rfade_simulate_layout(given) != RFADE_LAYOUT_COMMA)
        return rfade_usage(error, command, "--noise-dbm needs --layout comma");
    if (!given->second_channel &&
        !(isnan(given->second_carrier_hz) && isnan(given->second_mean_level_dbm)))
        return rfade_usage(error, command,
                           "settings of a second channel need --second-channel");
    return RFADE_OK;
}
