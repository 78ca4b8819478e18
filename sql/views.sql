-- SPDX-License-Identifier: GPL-3.0-or-later
-- For any SQLite client: built-in functions alone.

-- Every reading with its names and time. Levels as logged, without the vehicle's calibration.
CREATE VIEW reading_as_logged AS
SELECT
    reading.reading_id,
    vehicle.name AS vehicle,
    channel.name AS channel,
    campaign.name AS campaign,
    extent.start_us + reading.offset_us AS time_us,
    strftime('%Y-%m-%dT%H:%M:', (extent.start_us + reading.offset_us) / 1000000, 'unixepoch')
        || printf('%02d.%06dZ',
                  (extent.start_us + reading.offset_us) / 1000000 % 60,
                  (extent.start_us + reading.offset_us) % 1000000) AS time_utc,
    reading.level_cdb / 100.0 AS level_dbm,
    reading.snr_cdb / 100.0 AS snr_db,
    reading.lost_before,
    logger_file.name AS logger_file
FROM extent
JOIN reading ON reading.reading_id BETWEEN extent.first_reading_id
                AND extent.first_reading_id + extent.reading_count - 1
JOIN vehicle USING (vehicle_id)
JOIN channel USING (channel_id)
JOIN campaign USING (campaign_id)
JOIN logger_file USING (logger_file_id);

-- What each logger file brought, and what of it was refused.
CREATE VIEW logger_file_summary AS
SELECT
    logger_file.name AS logger_file,
    lower(hex(logger_file.sha256)) AS sha256,
    logger_file.size_bytes,
    logger_file.line_count,
    logger_file.reading_count,
    logger_file.fix_count,
    logger_file.refused_count,
    min(extent.start_us) AS first_reading_us,
    max(extent.end_us) AS last_reading_us
FROM logger_file
LEFT JOIN extent USING (logger_file_id)
GROUP BY logger_file_id;
