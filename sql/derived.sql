-- SPDX-License-Identifier: GPL-3.0-or-later
-- Results made from the survey's readings. Dropped and made again on a change of version,
-- never migrated. A fingerprint is the SHA-256 of all that a row was made from.

CREATE TABLE trace (
    trace_id INTEGER PRIMARY KEY,
    route_id INTEGER NOT NULL REFERENCES route ON DELETE CASCADE,
    vehicle_id INTEGER NOT NULL REFERENCES vehicle,
    channel_id INTEGER NOT NULL REFERENCES channel,
    campaign_id INTEGER NOT NULL REFERENCES campaign,
    start_us INTEGER NOT NULL,
    end_us INTEGER NOT NULL,
    reading_count INTEGER NOT NULL,   -- each reading once, however many files hold it
    repeated_count INTEGER NOT NULL,  -- the same reading in another file
    located_count INTEGER NOT NULL,   -- with a place on the route
    step_db REAL NOT NULL,            -- the channel's, or found in the data
    step_found INTEGER NOT NULL CHECK (step_found IN (0, 1)),
    -- Levels as logged. A reading at or below the floor stands for all below it; NULL: none.
    floor_dbm REAL,
    floor_source TEXT CHECK (floor_source IN ('channel', 'pile-up', 'noise', 'lost')),
    ceiling_dbm REAL,
    ceiling_source TEXT CHECK (ceiling_source IN ('channel', 'pile-up')),
    lost_count INTEGER,     -- sequence numbers missing; NULL: the log has none
    missing_count INTEGER,  -- without them, by a regular interval; NULL: it isn't regular
    wavelength_m REAL NOT NULL,
    fingerprint BLOB NOT NULL
) STRICT;
CREATE INDEX trace_by_channel ON trace (route_id, vehicle_id, channel_id, campaign_id, start_us);

CREATE TABLE traversal (
    traversal_id INTEGER PRIMARY KEY,
    trace_id INTEGER NOT NULL REFERENCES trace ON DELETE CASCADE,
    segment_id INTEGER NOT NULL REFERENCES segment ON DELETE CASCADE,
    pass_start_us INTEGER NOT NULL,  -- when the vehicle's pass along the route began
    start_us INTEGER NOT NULL,
    end_us INTEGER NOT NULL,
    reading_count INTEGER NOT NULL,
    travel_m REAL NOT NULL,
    level_uncertainty_db REAL NOT NULL, -- of the vehicle's calibration
    fading_tally BLOB NOT NULL,
    level_tally BLOB NOT NULL,
    local_mean_tally BLOB NOT NULL,
    snr_tally BLOB NOT NULL,            -- as logged
    noise_tally BLOB NOT NULL,          -- level less SNR
    blocks BLOB NOT NULL,
    sampling BLOB NOT NULL,
    crossings BLOB NOT NULL             -- of levels about the local mean
) STRICT;
CREATE INDEX traversal_by_segment ON traversal (segment_id);
CREATE INDEX traversal_by_trace ON traversal (trace_id);

-- What is known of one segment on one channel in one campaign, over all its traversals.
CREATE TABLE fading (
    fading_id INTEGER PRIMARY KEY,
    segment_id INTEGER NOT NULL REFERENCES segment ON DELETE CASCADE,
    channel_id INTEGER NOT NULL REFERENCES channel,
    campaign_id INTEGER NOT NULL REFERENCES campaign,
    fingerprint BLOB NOT NULL,
    sampling TEXT NOT NULL CHECK (sampling IN
        ('resolved', 'inseparable', 'undersampled', 'averaged', 'held', 'stationary')),
    pass_count INTEGER NOT NULL,
    reading_count INTEGER NOT NULL,
    travel_m REAL NOT NULL,             -- over all passes
    wavelength_m REAL NOT NULL,
    effective_count REAL,               -- of the mean power
    mean_power_dbm REAL,                -- dB of the mean power over the travel
    local_mean_dbm REAL,                -- mean over the travel of the local mean in dBm
    local_sigma_db REAL,                -- its standard deviation, the window's noise taken off
    local_sigma_low_db REAL,
    local_sigma_high_db REAL,
    window_noise_db REAL,               -- standard deviation of that noise
    level_uncertainty_db REAL,          -- standard error of the mean level
    calibration_db REAL NOT NULL,       -- the part of it that is the vehicles' calibration
    pass_deviation_db REAL,             -- of another pass's level, fading left out; one: NULL
    noise_dbm REAL,                     -- dB of the mean noise power that was logged
    level_tally BLOB NOT NULL,
    local_mean_tally BLOB NOT NULL,
    snr_tally BLOB NOT NULL,
    UNIQUE (segment_id, channel_id, campaign_id)
) STRICT;

-- Models fitted to the fast fading of one row of `fading`; none where it was not resolved.
CREATE TABLE fit (
    fading_id INTEGER NOT NULL REFERENCES fading ON DELETE CASCADE,
    model TEXT NOT NULL CHECK (model IN ('rayleigh', 'rice', 'nakagami', 'lognormal')),
    preferred INTEGER NOT NULL CHECK (preferred IN (0, 1)),
    offset_db REAL NOT NULL,            -- mean power of the fast fading about the local mean
    parameter REAL,                     -- k, m or sigma_db
    parameter_low REAL,
    parameter_high REAL,
    log_likelihood REAL NOT NULL,
    aic REAL NOT NULL,
    weight REAL,
    goodness_p REAL,
    PRIMARY KEY (fading_id, model)
) STRICT, WITHOUT ROWID;

-- The generation of the survey, and the settings, that the results stand for.
CREATE TABLE analysed (
    only INTEGER PRIMARY KEY CHECK (only = 1),
    generation INTEGER NOT NULL,
    settings BLOB NOT NULL
) STRICT;
