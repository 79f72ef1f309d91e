"""Air at a site: pressure from elevation by two model atmospheres or a measurement, and its density.

Each formula stands once, in a private kernel on arrays without guards; the public function is the guarded
wrapper, and `planner.physiology.chain` composes the same kernels in blocks.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final, TypeAlias

import numpy as np
from numpy.typing import NDArray

from planner.checks import FloatArray, FloatLike, checked, like
from planner.constants import (
    DRY_AIR_GAS_CONSTANT,
    EARTH_RADIUS_M,
    HPA_PER_MMHG,
    LAPSE_RATE_K_PER_M,
    PRESSURE_EXPONENT,
    SEA_LEVEL_PRESSURE_HPA,
    SEA_LEVEL_TEMPERATURE_K,
    WATER_VAPOUR_GAS_CONSTANT,
    ZERO_CELSIUS_K,
)

Words: TypeAlias = str | NDArray[np.str_]

# West 1996, J Appl Physiol 81:1850 (published): ln(PB/mmHg) = INTERCEPT - SLOPE k - CURVATURE k^2, k in km.
WEST_INTERCEPT: Final = 6.63268
WEST_SLOPE: Final = 0.1112
WEST_CURVATURE: Final = 0.00149

# Where the low-latitude model takes over. The ranges (30-35 degrees, 1500-2000 m) are published as the region
# in which it becomes the better one; the linear hand-over inside them is a judgement, made so that pressure
# stays strictly falling with elevation and continuous in latitude.
LOW_LATITUDE_FULL_DEG: Final = 30.0
LOW_LATITUDE_NONE_DEG: Final = 35.0
LOW_LATITUDE_FROM_M: Final = 1500.0
LOW_LATITUDE_FULL_M: Final = 2000.0

# How far the pressure of a morning may lie from the model (judgement): weather and season move station
# pressure by 5-8 hPa outside the tropics and by 2-3 hPa within them; a reading some hours old is 1 hPa off.
STANDARD_PRESSURE_SD_HPA: Final = 6.0
LOW_LATITUDE_PRESSURE_SD_HPA: Final = 3.0
MEASURED_PRESSURE_SD_HPA: Final = 1.0

FROM_STANDARD: Final = "standard atmosphere (ISO 2533)"
FROM_STANDARD_UNKNOWN: Final = "standard atmosphere (ISO 2533), latitude not known"
FROM_LOW_LATITUDE: Final = "model atmosphere for low latitudes (West 1996)"
FROM_BOTH: Final = "between the two model atmospheres"
FROM_MEASUREMENT: Final = "measured at the station"
FROM_NOTHING: Final = "not known"


@dataclass(frozen=True)
class SitePressure:
    """Station pressure [hPa], where it came from in words, and its standard deviation [hPa]."""

    pressure_hpa: FloatLike
    pressure_from: Words
    sd_hpa: FloatLike


def standard_pressure_hpa(elevation_m: FloatLike) -> FloatLike:
    """Pressure of the standard atmosphere at a geometric elevation.

    P = 1013.25 (T / 288.15)^5.25588 hPa with T = 288.15 - 0.0065 H and H the geopotential height.

    Parameters:
        elevation_m: geometric elevation [m], scalar or array.
    Returns:
        Pressure [hPa], the shape of elevation_m.
    Raises:
        InputError: an elevation outside -430 to 9000 m.
    Valid:
        -430 to 9000 m, within the layer 0-11 km of the model. Weather and season come on top.
    Source:
        ISO 2533:1975; ICAO Doc 7488 (published).
    Example:
        >>> standard_pressure_hpa(0.0)
        1013.25
    """
    return like(_standard_pressure_hpa(checked("elevation_m", elevation_m)), elevation_m)


def standard_elevation_m(pressure_hpa: FloatLike) -> FloatLike:
    """Geometric elevation of a pressure in the standard atmosphere: the inverse of standard_pressure_hpa.

    Parameters:
        pressure_hpa: air pressure [hPa], scalar or array.
    Returns:
        Geometric elevation [m], the shape of pressure_hpa.
    Raises:
        InputError: a pressure outside 300 to 1100 hPa.
    Valid:
        300 to 1100 hPa: about 9 160 to -700 m.
    Source:
        ISO 2533:1975 (published), solved for the height.
    Example:
        >>> standard_elevation_m(1013.25)
        0.0
    """
    return like(_standard_elevation_m(checked("pressure_hpa", pressure_hpa)), pressure_hpa)


def low_latitude_pressure_hpa(elevation_m: FloatLike) -> FloatLike:
    """Pressure at high sites near the equator, by West's model atmosphere.

    PB = exp(6.63268 - 0.1112 k - 0.00149 k^2) mmHg, k in km.

    Parameters:
        elevation_m: geometric elevation [m], scalar or array.
    Returns:
        Pressure [hPa], the shape of elevation_m.
    Raises:
        InputError: an elevation outside -430 to 9000 m.
    Valid:
        The better model within 30 to 35 degrees of the equator and above 1500 to 2000 m; elsewhere it reads
        several hPa high. site_pressure applies that rule.
    Source:
        West 1996, J Appl Physiol 81:1850 (published constants).
    Example:
        >>> round(low_latitude_pressure_hpa(2240.0), 1)
        783.5
    """
    return like(_low_latitude_pressure_hpa(checked("elevation_m", elevation_m)), elevation_m)


def low_latitude_elevation_m(pressure_hpa: FloatLike) -> FloatLike:
    """Elevation at which West's model has a pressure: the inverse of low_latitude_pressure_hpa.

    Parameters:
        pressure_hpa: air pressure [hPa], scalar or array.
    Returns:
        Geometric elevation [m], the shape of pressure_hpa.
    Raises:
        InputError: a pressure outside 300 to 1100 hPa.
    Valid:
        300 to 1100 hPa; the same region as low_latitude_pressure_hpa.
    Source:
        West 1996, J Appl Physiol 81:1850 (published constants), the quadratic solved for the height.
    Example:
        >>> round(low_latitude_elevation_m(low_latitude_pressure_hpa(3200.0)), 6)
        3200.0
    """
    return like(_low_latitude_elevation_m(checked("pressure_hpa", pressure_hpa)), pressure_hpa)


def site_pressure(
    elevation_m: FloatLike,
    latitude_deg: FloatLike = np.nan,
    measured_pressure_hpa: FloatLike = np.nan,
) -> SitePressure:
    """Best available pressure at a site: measured, else the model atmosphere for its latitude and elevation.

    West's model within 30 degrees of the equator from 2000 m up, the standard atmosphere beyond 35 degrees
    or below 1500 m, and a linear blend of the two between; a measured station pressure beats both.

    Parameters:
        elevation_m: geometric elevation [m], scalar or array.
        latitude_deg: geographic latitude [deg], scalar or array; NaN where it is not known.
        measured_pressure_hpa: station pressure read on site [hPa], scalar or array; NaN where none was read.
    Returns:
        SitePressure: pressure [hPa], its source in words, its standard deviation [hPa] (judgement), each in
        the common shape of the inputs. Unknown latitude takes the standard atmosphere, says so, and its
        standard deviation grows by the chance that the site lies near the equator.
    Raises:
        InputError: an elevation, latitude or pressure out of range.
    Valid:
        -430 to 9000 m. Pressure falls strictly with elevation at every latitude.
    Source:
        ISO 2533:1975; West 1996, J Appl Physiol 81:1850 (published); hand-over and spread: judgement.
    Example:
        >>> site_pressure(2240.0, 19.0).pressure_from
        'model atmosphere for low latitudes (West 1996)'
    """
    elevation = checked("elevation_m", elevation_m)
    latitude = checked("latitude_deg", latitude_deg)
    measured = checked("pressure_hpa", measured_pressure_hpa, "measured_pressure_hpa")
    given = (elevation_m, latitude_deg, measured_pressure_hpa)

    standard = _standard_pressure_hpa(elevation)
    low_latitude = _low_latitude_pressure_hpa(elevation)
    high_enough = _share_by_elevation(elevation)
    share = _share_by_latitude(latitude) * high_enough
    unknown = np.isnan(latitude)
    has_measured = ~np.isnan(measured)
    gap = low_latitude - standard

    pressure = np.where(has_measured, measured, standard + share * gap)
    variance = share * LOW_LATITUDE_PRESSURE_SD_HPA**2 + (1.0 - share) * STANDARD_PRESSURE_SD_HPA**2
    # The spread of a mixture of two models; with no latitude, even odds for the other one.
    doubt = np.where(unknown, 0.5 * high_enough, share * (1.0 - share)) * gap**2
    sd = np.where(has_measured, MEASURED_PRESSURE_SD_HPA, np.sqrt(variance + doubt))

    words = np.select(
        [
            has_measured,
            np.isnan(pressure),
            unknown & np.full_like(pressure, True, dtype=bool),
            share <= 0.0,
            share >= 1.0,
        ],
        [FROM_MEASUREMENT, FROM_NOTHING, FROM_STANDARD_UNKNOWN, FROM_STANDARD, FROM_LOW_LATITUDE],
        FROM_BOTH,
    )
    return SitePressure(
        pressure_hpa=like(pressure, *given),
        pressure_from=str(words) if words.ndim == 0 else words,
        sd_hpa=like(sd, *given),
    )


def station_pressure_from_altimeter_setting_hpa(
    altimeter_setting_hpa: FloatLike, elevation_m: FloatLike
) -> FloatLike:
    """Station pressure from the altimeter setting (QNH) that an airfield reports.

    QFE = (QNH^n - 1013.25^n (0.0065 / 288.15) H)^(1/n), n = 1/5.25588. The elevation enters as it stands, as
    altimeters do it; taken as geometric that is up to 0.1 hPa below standard_pressure_hpa at 2500 m.

    Parameters:
        altimeter_setting_hpa: QNH, reduced to sea level by the standard atmosphere [hPa], scalar or array.
        elevation_m: elevation of the station [m], scalar or array.
    Returns:
        Station pressure [hPa], the common shape of the inputs.
    Raises:
        InputError: an altimeter setting outside 870 to 1090 hPa or an elevation out of range.
    Valid:
        -430 to 9000 m. A sea-level pressure reduced with the site's own temperature (QFF, the one on weather
        maps) must not be used here: it is several hPa wrong at 2000 m.
    Source:
        ICAO Doc 7488 and the definition of QNH (published).
    Example:
        >>> round(station_pressure_from_altimeter_setting_hpa(1025.0, 2240.0), 2)
        780.97
    """
    setting = checked("altimeter_setting_hpa", altimeter_setting_hpa)
    elevation = checked("elevation_m", elevation_m)
    n = 1.0 / PRESSURE_EXPONENT
    fall = SEA_LEVEL_PRESSURE_HPA**n * LAPSE_RATE_K_PER_M / SEA_LEVEL_TEMPERATURE_K
    pressure = (setting**n - fall * elevation) ** PRESSURE_EXPONENT
    return like(pressure, altimeter_setting_hpa, elevation_m)


def saturation_vapour_pressure_kpa(air_temperature_c: FloatLike) -> FloatLike:
    """Saturation vapour pressure of water over a plane surface of water.

    0.6105 exp(17.27 t / (t + 237.3)) kPa.

    Parameters:
        air_temperature_c: temperature [C], scalar or array.
    Returns:
        Vapour pressure [kPa], the shape of air_temperature_c.
    Raises:
        InputError: a temperature outside -60 to 75 C.
    Valid:
        0 to 60 C within 0.3 %; below 0 C it stays the value over supercooled water.
    Source:
        ISO 7933:2023 (published).
    Example:
        >>> round(saturation_vapour_pressure_kpa(20.0), 3)
        2.337
    """
    temperature = checked("air_temperature_c", air_temperature_c)
    return like(_saturation_vapour_pressure_kpa(temperature), air_temperature_c)


def moist_air_density_kg_m3(
    pressure_hpa: FloatLike, air_temperature_c: FloatLike, humidity_pct: FloatLike
) -> FloatLike:
    """Density of moist air as a mixture of two ideal gases.

    (p - e) / (287.05 T) + e / (461.495 T), Pa and K, with e the vapour pressure.

    Parameters:
        pressure_hpa: air pressure at the station [hPa], scalar or array.
        air_temperature_c: dry-bulb temperature [C], scalar or array.
        humidity_pct: relative humidity, 0 to 100 [%], scalar or array.
    Returns:
        Density [kg/m3], the common shape of the inputs.
    Raises:
        InputError: a pressure, temperature or humidity out of range.
    Valid:
        300 to 1100 hPa, -60 to 75 C; within 0.05 % of CIPM-2007 at 600-1100 hPa and 15-27 C.
    Source:
        Mixture of ideal gases with the gas constants of ISO 2533 and of water vapour (published).
    Example:
        >>> round(moist_air_density_kg_m3(1013.25, 20.0, 50.0), 4)
        1.1989
    """
    pressure = checked("pressure_hpa", pressure_hpa)
    temperature = checked("air_temperature_c", air_temperature_c)
    humidity = checked("humidity_pct", humidity_pct)
    vapour_pa = 10.0 * humidity * _saturation_vapour_pressure_kpa(temperature)
    kelvin = temperature + ZERO_CELSIUS_K
    density = (100.0 * pressure - vapour_pa) / (DRY_AIR_GAS_CONSTANT * kelvin)
    density = density + vapour_pa / (WATER_VAPOUR_GAS_CONSTANT * kelvin)
    return like(density, pressure_hpa, air_temperature_c, humidity_pct)


def standard_air_density_kg_m3(elevation_m: FloatLike) -> FloatLike:
    """Density of the standard atmosphere (dry, at its own temperature) at a geometric elevation.

    Parameters:
        elevation_m: geometric elevation [m], scalar or array.
    Returns:
        Density [kg/m3], the shape of elevation_m.
    Raises:
        InputError: an elevation outside -430 to 9000 m.
    Valid:
        -430 to 9000 m. A hot day at the same pressure is lighter: use moist_air_density_kg_m3.
    Source:
        ISO 2533:1975 (published): P / (287.05287 T).
    Example:
        >>> round(standard_air_density_kg_m3(0.0), 4)
        1.225
    """
    elevation = checked("elevation_m", elevation_m)
    kelvin = SEA_LEVEL_TEMPERATURE_K * _standard_temperature_ratio(elevation)
    density = 100.0 * _standard_pressure_hpa(elevation) / (DRY_AIR_GAS_CONSTANT * kelvin)
    return like(density, elevation_m)


def _standard_temperature_ratio(elevation: FloatArray) -> FloatArray:
    """Temperature over that at sea level; geopotential height is R h / (R + h), with the constants folded."""
    fall = LAPSE_RATE_K_PER_M * EARTH_RADIUS_M / SEA_LEVEL_TEMPERATURE_K
    return 1.0 - fall * (elevation / (EARTH_RADIUS_M + elevation))


def _standard_pressure_hpa(elevation: FloatArray) -> FloatArray:
    return SEA_LEVEL_PRESSURE_HPA * _standard_temperature_ratio(elevation) ** PRESSURE_EXPONENT


def _standard_elevation_m(pressure: FloatArray) -> FloatArray:
    ratio = (pressure / SEA_LEVEL_PRESSURE_HPA) ** (1.0 / PRESSURE_EXPONENT)
    geopotential = SEA_LEVEL_TEMPERATURE_K * (1.0 - ratio) / LAPSE_RATE_K_PER_M
    return geopotential * EARTH_RADIUS_M / (EARTH_RADIUS_M - geopotential)


def _low_latitude_pressure_hpa(elevation: FloatArray) -> FloatArray:
    km = elevation / 1000.0
    return HPA_PER_MMHG * np.exp(WEST_INTERCEPT - km * (WEST_SLOPE + WEST_CURVATURE * km))


def _low_latitude_elevation_m(pressure: FloatArray) -> FloatArray:
    fall = WEST_INTERCEPT - np.log(pressure / HPA_PER_MMHG)
    # The root of the quadratic in the form that loses no digits near sea level.
    root = np.sqrt(WEST_SLOPE**2 + 4.0 * WEST_CURVATURE * fall)
    return np.asarray(1000.0 * 2.0 * fall / (WEST_SLOPE + root))


def _share_by_elevation(elevation: FloatArray) -> FloatArray:
    share = (elevation - LOW_LATITUDE_FROM_M) / (LOW_LATITUDE_FULL_M - LOW_LATITUDE_FROM_M)
    return np.clip(share, 0.0, 1.0)


def _share_by_latitude(latitude: FloatArray) -> FloatArray:
    share = (LOW_LATITUDE_NONE_DEG - np.abs(latitude)) / (LOW_LATITUDE_NONE_DEG - LOW_LATITUDE_FULL_DEG)
    # fmax takes the number beside a NaN: a latitude that is not known has no share in the low-latitude model.
    return np.fmin(np.fmax(share, 0.0), 1.0)


def _site_pressure_hpa(elevation: FloatArray, latitude: FloatArray) -> FloatArray:
    standard = _standard_pressure_hpa(elevation)
    by_latitude = _share_by_latitude(latitude)
    if latitude.ndim == 0 and by_latitude == 0.0:  # spares the second model for a site that has no use for it
        return standard
    share = by_latitude * _share_by_elevation(elevation)
    return standard + share * (_low_latitude_pressure_hpa(elevation) - standard)


def _saturation_vapour_pressure_kpa(temperature: FloatArray) -> FloatArray:
    return np.asarray(0.6105 * np.exp(17.27 * temperature / (temperature + 237.3)))
