-- SPDX-License-Identifier: GPL-3.0-or-later
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
