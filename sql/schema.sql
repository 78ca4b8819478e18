-- SPDX-License-Identifier: GPL-3.0-or-later
-- The survey. Names are the words of the trade; units stand in the column names.
-- Times are microseconds since 1970-01-01T00:00:00Z; levels centi-dBm, ratios centi-dB.

CREATE TABLE campaign (
    campaign_id INTEGER PRIMARY KEY,
    name TEXT NOT NULL UNIQUE CHECK (length(name) > 0)
) STRICT;

CREATE TABLE vehicle (
    vehicle_id INTEGER PRIMARY KEY,
    name TEXT NOT NULL UNIQUE CHECK (length(name) > 0)
) STRICT;

-- Calibration of a vehicle's receiving chain, in force from a time on until the next one.
-- offset_db is added to the level as logged.
CREATE TABLE calibration (
    vehicle_id INTEGER NOT NULL REFERENCES vehicle,
    from_us INTEGER NOT NULL,
    offset_db REAL NOT NULL CHECK (abs(offset_db) <= 200),
    offset_uncertainty_db REAL NOT NULL CHECK (offset_uncertainty_db BETWEEN 0 AND 50),
    PRIMARY KEY (vehicle_id, from_us)
) STRICT, WITHOUT ROWID;

-- NULL: not told. A log may name a channel before anyone describes it.
CREATE TABLE channel (
    channel_id INTEGER PRIMARY KEY,
    name TEXT NOT NULL UNIQUE CHECK (length(name) > 0),
    carrier_hz REAL CHECK (carrier_hz BETWEEN 1e5 AND 3e11),
    bandwidth_hz REAL CHECK (bandwidth_hz > 0),
    symbol_rate_hz REAL CHECK (symbol_rate_hz > 0),
    noise_figure_db REAL CHECK (noise_figure_db BETWEEN 0 AND 100),
    noise_floor_dbm REAL CHECK (noise_floor_dbm BETWEEN -250 AND 100),
    step_db REAL CHECK (step_db BETWEEN 0.01 AND 20),
    floor_dbm REAL CHECK (floor_dbm BETWEEN -250 AND 100),
    ceiling_dbm REAL CHECK (ceiling_dbm > floor_dbm)
) STRICT;

-- One source file, known by its SHA-256: the same bytes are never counted twice.
CREATE TABLE logger_file (
    logger_file_id INTEGER PRIMARY KEY,
    sha256 BLOB NOT NULL UNIQUE CHECK (length(sha256) = 32),
    name TEXT NOT NULL,
    size_bytes INTEGER NOT NULL CHECK (size_bytes >= 0),
    line_count INTEGER NOT NULL CHECK (line_count >= 0),
    reading_count INTEGER NOT NULL CHECK (reading_count >= 0),
    fix_count INTEGER NOT NULL CHECK (fix_count >= 0),
    -- Fixes of a vehicle and time that the file had given before: at another place (the first
    -- is kept).
    differing_fix_count INTEGER NOT NULL CHECK (differing_fix_count >= 0),
    refused_count INTEGER NOT NULL CHECK (refused_count >= 0)
) STRICT;

-- What was refused is kept: the first 200 bytes of the line as they stand in the file.
CREATE TABLE refused_line (
    logger_file_id INTEGER NOT NULL REFERENCES logger_file ON DELETE CASCADE,
    line INTEGER NOT NULL CHECK (line >= 1),
    reason TEXT NOT NULL,
    text BLOB NOT NULL CHECK (length(text) <= 200)
) STRICT;
CREATE INDEX refused_line_by_file ON refused_line (logger_file_id);

-- Positions, once a position. Clustered by vehicle and time, the way they are read.
CREATE TABLE fix (
    vehicle_id INTEGER NOT NULL REFERENCES vehicle,
    time_us INTEGER NOT NULL,
    logger_file_id INTEGER NOT NULL REFERENCES logger_file ON DELETE CASCADE,
    latitude_deg REAL NOT NULL CHECK (latitude_deg BETWEEN -90 AND 90),
    longitude_deg REAL NOT NULL CHECK (longitude_deg BETWEEN -180 AND 180),
    speed_m_s REAL CHECK (speed_m_s >= 0),
    PRIMARY KEY (vehicle_id, time_us, logger_file_id)
) STRICT, WITHOUT ROWID;

-- Up to 65,536 readings of one channel out of one logger file, in time order, at the
-- consecutive ids first_reading_id .. first_reading_id + reading_count - 1. Never changes.
CREATE TABLE extent (
    extent_id INTEGER PRIMARY KEY,
    logger_file_id INTEGER NOT NULL REFERENCES logger_file ON DELETE CASCADE,
    vehicle_id INTEGER NOT NULL REFERENCES vehicle,
    channel_id INTEGER NOT NULL REFERENCES channel,
    campaign_id INTEGER NOT NULL REFERENCES campaign,
    ordinal INTEGER NOT NULL, -- place in the file, from 0
    first_reading_id INTEGER NOT NULL UNIQUE,
    reading_count INTEGER NOT NULL CHECK (reading_count BETWEEN 1 AND 65536),
    start_us INTEGER NOT NULL,
    end_us INTEGER NOT NULL,
    CHECK (end_us >= start_us)
) STRICT;
CREATE INDEX extent_by_channel ON extent (vehicle_id, channel_id, campaign_id, start_us);
CREATE INDEX extent_by_file ON extent (logger_file_id);

-- No secondary index and no position here: about 20 bytes a reading.
CREATE TABLE reading (
    reading_id INTEGER PRIMARY KEY,
    offset_us INTEGER NOT NULL, -- from the extent's start_us
    level_cdb INTEGER,
    snr_cdb INTEGER,
    -- Sequence numbers missing since the reading before in the file; NULL: not known.
    lost_before INTEGER CHECK (lost_before >= 0),
    CHECK (level_cdb IS NOT NULL OR snr_cdb IS NOT NULL)
) STRICT;

-- Readings belong to their extent, though only its range of ids says so.
CREATE TRIGGER extent_deleted AFTER DELETE ON extent BEGIN
    DELETE FROM reading WHERE reading_id BETWEEN old.first_reading_id
        AND old.first_reading_id + old.reading_count - 1;
END;

CREATE TABLE route (
    route_id INTEGER PRIMARY KEY,
    name TEXT NOT NULL UNIQUE CHECK (length(name) > 0),
    length_m REAL NOT NULL CHECK (length_m > 0),
    segment_m REAL NOT NULL CHECK (segment_m > 0),
    corridor_m REAL NOT NULL CHECK (corridor_m > 0) -- fixes further off do not match
) STRICT;

CREATE TABLE route_point (
    route_id INTEGER NOT NULL REFERENCES route ON DELETE CASCADE,
    ordinal INTEGER NOT NULL,
    latitude_deg REAL NOT NULL CHECK (latitude_deg BETWEEN -90 AND 90),
    longitude_deg REAL NOT NULL CHECK (longitude_deg BETWEEN -180 AND 180),
    chainage_m REAL NOT NULL CHECK (chainage_m >= 0),
    PRIMARY KEY (route_id, ordinal)
) STRICT, WITHOUT ROWID;

CREATE TABLE segment (
    segment_id INTEGER PRIMARY KEY,
    route_id INTEGER NOT NULL REFERENCES route ON DELETE CASCADE,
    number INTEGER NOT NULL CHECK (number >= 1),
    from_m REAL NOT NULL CHECK (from_m >= 0),
    to_m REAL NOT NULL,
    UNIQUE (route_id, number),
    CHECK (to_m > from_m)
) STRICT;

-- Noise that was measured along a route, by channel: from from_m on and before to_m.
CREATE TABLE noise (
    route_id INTEGER NOT NULL REFERENCES route ON DELETE CASCADE,
    channel_id INTEGER NOT NULL REFERENCES channel,
    from_m REAL NOT NULL CHECK (from_m >= 0),
    to_m REAL NOT NULL,
    noise_dbm REAL NOT NULL CHECK (noise_dbm BETWEEN -250 AND 100),
    PRIMARY KEY (route_id, channel_id, from_m),
    CHECK (to_m > from_m)
) STRICT, WITHOUT ROWID;

-- Counts every change of what results are made from.
CREATE TABLE generation (
    only INTEGER PRIMARY KEY CHECK (only = 1),
    current INTEGER NOT NULL
) STRICT;
INSERT INTO generation VALUES (1, 1);

-- The tables and views that derived.sql and views.sql made, and the SHA-256 of those files:
-- where it differs from the program's, they are dropped and made again.
CREATE TABLE derived_object (
    name TEXT NOT NULL PRIMARY KEY,
    type TEXT NOT NULL CHECK (type IN ('table', 'view')),
    made_by_sha256 BLOB NOT NULL CHECK (length(made_by_sha256) = 32)
) STRICT, WITHOUT ROWID;
