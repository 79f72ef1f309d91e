"""The tables of version 1, as they were released: never edited, so that every old file can be brought on."""

from __future__ import annotations

from typing import Final

STATEMENTS: Final[tuple[str, ...]] = (
    """
    CREATE TABLE change_set (
        id INTEGER NOT NULL,
        at BIGINT NOT NULL,
        "by" TEXT NOT NULL,
        why TEXT NOT NULL,
        undoes INTEGER,
        PRIMARY KEY (id),
        FOREIGN KEY(undoes) REFERENCES change_set (id)
    )
    """,
    """
    CREATE TABLE meta (
        name TEXT NOT NULL,
        value TEXT NOT NULL,
        PRIMARY KEY (name)
    )
    """,
    """
    CREATE TABLE migration (
        number INTEGER NOT NULL,
        name TEXT NOT NULL,
        applied_at BIGINT NOT NULL,
        PRIMARY KEY (number)
    )
    """,
    """
    CREATE TABLE setting (
        name TEXT NOT NULL,
        value TEXT NOT NULL,
        PRIMARY KEY (name)
    )
    """,
    """
    CREATE TABLE change (
        id INTEGER NOT NULL,
        change_set_id INTEGER NOT NULL,
        kind TEXT NOT NULL,
        record_id INTEGER NOT NULL,
        action TEXT NOT NULL,
        "before" TEXT,
        why TEXT NOT NULL,
        PRIMARY KEY (id),
        FOREIGN KEY(change_set_id) REFERENCES change_set (id)
    )
    """,
    "CREATE INDEX ix_change_change_set_id ON change (change_set_id)",
    "CREATE INDEX ix_change_record ON change (record_id, kind)",
    """
    CREATE TABLE place (
        id INTEGER NOT NULL,
        name TEXT NOT NULL,
        zone TEXT NOT NULL,
        track_elevation_m FLOAT NOT NULL,
        bed_elevation_m FLOAT NOT NULL,
        latitude_deg FLOAT NOT NULL,
        longitude_deg FLOAT NOT NULL,
        removed_in INTEGER,
        PRIMARY KEY (id),
        FOREIGN KEY(removed_in) REFERENCES change_set (id)
    )
    """,
    "CREATE UNIQUE INDEX uq_place ON place (name) WHERE removed_in IS NULL",
    """
    CREATE TABLE driver (
        id INTEGER NOT NULL,
        name TEXT NOT NULL,
        sex TEXT NOT NULL,
        home_place_id INTEGER NOT NULL,
        mass_kg FLOAT NOT NULL,
        height_cm FLOAT NOT NULL,
        bottle_ml FLOAT NOT NULL,
        sweat_sodium_mmol_l FLOAT,
        altitude_history TEXT NOT NULL,
        highest_bed_elevation_m FLOAT,
        tent_note TEXT NOT NULL,
        iron_checked_on DATE,
        wake_time TEXT NOT NULL,
        removed_in INTEGER,
        PRIMARY KEY (id),
        FOREIGN KEY(home_place_id) REFERENCES place (id) ON DELETE RESTRICT,
        FOREIGN KEY(removed_in) REFERENCES change_set (id)
    )
    """,
    "CREATE UNIQUE INDEX uq_driver ON driver (name) WHERE removed_in IS NULL",
    """
    CREATE TABLE pressure_measurement (
        id INTEGER NOT NULL,
        place_id INTEGER NOT NULL,
        measured_at BIGINT NOT NULL,
        pressure_hpa FLOAT NOT NULL,
        typed TEXT NOT NULL,
        removed_in INTEGER,
        PRIMARY KEY (id),
        FOREIGN KEY(place_id) REFERENCES place (id) ON DELETE CASCADE,
        FOREIGN KEY(removed_in) REFERENCES change_set (id)
    )
    """,
    """
    CREATE TABLE round (
        id INTEGER NOT NULL,
        number INTEGER NOT NULL,
        name TEXT NOT NULL,
        place_id INTEGER NOT NULL,
        removed_in INTEGER,
        PRIMARY KEY (id),
        FOREIGN KEY(place_id) REFERENCES place (id) ON DELETE RESTRICT,
        FOREIGN KEY(removed_in) REFERENCES change_set (id)
    )
    """,
    "CREATE UNIQUE INDEX uq_round ON round (name) WHERE removed_in IS NULL",
    """
    CREATE TABLE commitment (
        id INTEGER NOT NULL,
        driver_id INTEGER NOT NULL,
        name TEXT NOT NULL,
        place_id INTEGER NOT NULL,
        starts_at BIGINT NOT NULL,
        ends_at BIGINT NOT NULL,
        removed_in INTEGER,
        PRIMARY KEY (id),
        FOREIGN KEY(driver_id) REFERENCES driver (id) ON DELETE CASCADE,
        FOREIGN KEY(place_id) REFERENCES place (id) ON DELETE RESTRICT,
        FOREIGN KEY(removed_in) REFERENCES change_set (id)
    )
    """,
    """
    CREATE TABLE leg (
        id INTEGER NOT NULL,
        driver_id INTEGER NOT NULL,
        from_place_id INTEGER NOT NULL,
        to_place_id INTEGER NOT NULL,
        depart_at BIGINT NOT NULL,
        arrive_at BIGINT NOT NULL,
        mode TEXT NOT NULL,
        cabin_altitude_m FLOAT,
        removed_in INTEGER,
        PRIMARY KEY (id),
        FOREIGN KEY(driver_id) REFERENCES driver (id) ON DELETE CASCADE,
        FOREIGN KEY(from_place_id) REFERENCES place (id) ON DELETE RESTRICT,
        FOREIGN KEY(to_place_id) REFERENCES place (id) ON DELETE RESTRICT,
        FOREIGN KEY(removed_in) REFERENCES change_set (id)
    )
    """,
    """
    CREATE TABLE morning_mark (
        id INTEGER NOT NULL,
        driver_id INTEGER NOT NULL,
        at BIGINT NOT NULL,
        mass_kg FLOAT,
        urine_colour INTEGER,
        urine_specific_gravity FLOAT,
        thirsty BOOLEAN,
        entered_by TEXT NOT NULL,
        removed_in INTEGER,
        PRIMARY KEY (id),
        FOREIGN KEY(driver_id) REFERENCES driver (id) ON DELETE CASCADE,
        FOREIGN KEY(removed_in) REFERENCES change_set (id)
    )
    """,
    """
    CREATE TABLE notice (
        id INTEGER NOT NULL,
        driver_id INTEGER NOT NULL,
        at BIGINT NOT NULL,
        kind TEXT NOT NULL,
        text TEXT NOT NULL,
        entered_by TEXT NOT NULL,
        removed_in INTEGER,
        PRIMARY KEY (id),
        FOREIGN KEY(driver_id) REFERENCES driver (id) ON DELETE CASCADE,
        FOREIGN KEY(removed_in) REFERENCES change_set (id)
    )
    """,
    """
    CREATE TABLE reading (
        id INTEGER NOT NULL,
        driver_id INTEGER NOT NULL,
        place_id INTEGER NOT NULL,
        taken_at BIGINT NOT NULL,
        spo2_pct FLOAT NOT NULL,
        pulse_bpm FLOAT,
        wakefulness TEXT NOT NULL,
        circumstance TEXT NOT NULL,
        device TEXT NOT NULL,
        warm_hand BOOLEAN NOT NULL,
        quality_note TEXT NOT NULL,
        emergency_signs TEXT NOT NULL,
        headache INTEGER,
        gut INTEGER,
        fatigue INTEGER,
        dizziness INTEGER,
        left_out TEXT NOT NULL,
        entered_by TEXT NOT NULL,
        removed_in INTEGER,
        PRIMARY KEY (id),
        FOREIGN KEY(driver_id) REFERENCES driver (id) ON DELETE CASCADE,
        FOREIGN KEY(place_id) REFERENCES place (id) ON DELETE RESTRICT,
        FOREIGN KEY(removed_in) REFERENCES change_set (id)
    )
    """,
    "CREATE INDEX ix_reading_taken_at ON reading (taken_at)",
    """
    CREATE UNIQUE INDEX uq_reading ON reading (driver_id, taken_at, wakefulness, device, spo2_pct)
    WHERE removed_in IS NULL
    """,
    """
    CREATE TABLE session (
        id INTEGER NOT NULL,
        round_id INTEGER NOT NULL,
        kind TEXT NOT NULL,
        name TEXT NOT NULL,
        starts_at BIGINT NOT NULL,
        ends_at BIGINT NOT NULL,
        removed_in INTEGER,
        PRIMARY KEY (id),
        FOREIGN KEY(round_id) REFERENCES round (id) ON DELETE CASCADE,
        FOREIGN KEY(removed_in) REFERENCES change_set (id)
    )
    """,
    "CREATE UNIQUE INDEX uq_session ON session (round_id, name) WHERE removed_in IS NULL",
    """
    CREATE TABLE sick_period (
        id INTEGER NOT NULL,
        driver_id INTEGER NOT NULL,
        starts_at BIGINT NOT NULL,
        ends_at BIGINT,
        marked_by TEXT NOT NULL,
        note TEXT NOT NULL,
        removed_in INTEGER,
        PRIMARY KEY (id),
        FOREIGN KEY(driver_id) REFERENCES driver (id) ON DELETE CASCADE,
        FOREIGN KEY(removed_in) REFERENCES change_set (id)
    )
    """,
    """
    CREATE TABLE stay (
        id INTEGER NOT NULL,
        driver_id INTEGER NOT NULL,
        place_id INTEGER NOT NULL,
        arrive_at BIGINT NOT NULL,
        depart_at BIGINT NOT NULL,
        bed_elevation_m FLOAT,
        tent_oxygen_fraction FLOAT,
        tent_hours_per_night FLOAT NOT NULL,
        removed_in INTEGER,
        PRIMARY KEY (id),
        FOREIGN KEY(driver_id) REFERENCES driver (id) ON DELETE CASCADE,
        FOREIGN KEY(place_id) REFERENCES place (id) ON DELETE RESTRICT,
        FOREIGN KEY(removed_in) REFERENCES change_set (id)
    )
    """,
    """
    CREATE TABLE cockpit_conditions (
        id INTEGER NOT NULL,
        session_id INTEGER NOT NULL,
        air_temperature_c FLOAT NOT NULL,
        radiant_temperature_c FLOAT NOT NULL,
        humidity_pct FLOAT NOT NULL,
        air_speed_m_s FLOAT NOT NULL,
        measured BOOLEAN NOT NULL,
        removed_in INTEGER,
        PRIMARY KEY (id),
        FOREIGN KEY(session_id) REFERENCES session (id) ON DELETE CASCADE,
        FOREIGN KEY(removed_in) REFERENCES change_set (id)
    )
    """,
    """
    CREATE TABLE weighing (
        id INTEGER NOT NULL,
        driver_id INTEGER NOT NULL,
        place_id INTEGER NOT NULL,
        starts_at BIGINT NOT NULL,
        ends_at BIGINT,
        mass_before_kg FLOAT NOT NULL,
        mass_after_kg FLOAT,
        drink_ml FLOAT NOT NULL,
        food_g FLOAT NOT NULL,
        urine_ml FLOAT NOT NULL,
        clothes TEXT NOT NULL,
        ensemble TEXT NOT NULL,
        air_temperature_c FLOAT,
        radiant_temperature_c FLOAT,
        humidity_pct FLOAT,
        air_speed_m_s FLOAT,
        metabolic_w_m2 FLOAT,
        session_id INTEGER,
        entered_by TEXT NOT NULL,
        removed_in INTEGER,
        PRIMARY KEY (id),
        FOREIGN KEY(driver_id) REFERENCES driver (id) ON DELETE CASCADE,
        FOREIGN KEY(place_id) REFERENCES place (id) ON DELETE RESTRICT,
        FOREIGN KEY(session_id) REFERENCES session (id) ON DELETE RESTRICT,
        FOREIGN KEY(removed_in) REFERENCES change_set (id)
    )
    """,
)
