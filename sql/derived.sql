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
    fingerprint BLOB NOT NULL
) STRICT;
CREATE INDEX trace_by_channel ON trace (route_id, vehicle_id, channel_id, campaign_id, start_us);

CREATE TABLE traversal (
    traversal_id INTEGER PRIMARY KEY,
    trace_id INTEGER NOT NULL REFERENCES trace ON DELETE CASCADE,
    segment_id INTEGER NOT NULL REFERENCES segment ON DELETE CASCADE,
    pass INTEGER NOT NULL,           -- of the trace along the route, from 1
    start_us INTEGER NOT NULL,
    end_us INTEGER NOT NULL,
    reading_count INTEGER NOT NULL,
    travel_m REAL NOT NULL,
    fading_tally BLOB NOT NULL,
    level_tally BLOB NOT NULL,
    local_mean_tally BLOB NOT NULL,
    blocks BLOB NOT NULL,
    sampling BLOB NOT NULL
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
    effective_count REAL,
    mean_power_dbm REAL,
    local_mean_dbm REAL,          -- mean over the track of the local mean in dBm
    local_sigma_db REAL,
    local_sigma_low_db REAL,
    local_sigma_high_db REAL,
    level_tally BLOB NOT NULL,
    local_mean_tally BLOB NOT NULL,
    UNIQUE (segment_id, channel_id, campaign_id)
) STRICT;

CREATE TABLE fit (
    fading_id INTEGER NOT NULL REFERENCES fading ON DELETE CASCADE,
    model TEXT NOT NULL CHECK (model IN ('rayleigh', 'rice', 'nakagami', 'lognormal')),
    preferred INTEGER NOT NULL CHECK (preferred IN (0, 1)),
    parameter REAL,
    parameter_low REAL,
    parameter_high REAL,
    parameter_variance REAL,
    log_likelihood REAL NOT NULL,
    aic REAL NOT NULL,
    weight REAL,
    goodness_p REAL,
    PRIMARY KEY (fading_id, model)
) STRICT, WITHOUT ROWID;
