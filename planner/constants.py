"""Physical constants that more than one formula uses. One place for each fact."""

from typing import Final

# CODATA/BIPM conversion, exact by definition of the conventional millimetre of mercury.
PASCAL_PER_MMHG: Final = 133.322387415
HPA_PER_MMHG: Final = PASCAL_PER_MMHG / 100.0

# ISO 2533:1975, standard atmosphere, layer 0-11 km.
SEA_LEVEL_PRESSURE_HPA: Final = 1013.25
SEA_LEVEL_TEMPERATURE_K: Final = 288.15
LAPSE_RATE_K_PER_M: Final = 0.0065
PRESSURE_EXPONENT: Final = 5.25588
DRY_AIR_GAS_CONSTANT: Final = 287.05287  # J/(kg K)
WATER_VAPOUR_GAS_CONSTANT: Final = 461.495  # J/(kg K)
EARTH_RADIUS_M: Final = 6_356_766.0  # ISO 2533, for geopotential height

# Saturated water vapour at 37 degrees C, the air in the windpipe.
BODY_WATER_VAPOUR_MMHG: Final = 47.0
AIR_OXYGEN_FRACTION: Final = 0.2094  # dry air; published values run from 0.2093 to 0.2095

ZERO_CELSIUS_K: Final = 273.15
HOURS_PER_DAY: Final = 24.0

# Standard deviations on either side of the mean that hold 95 % of a normal distribution (any table).
DEVIATIONS_95: Final = 1.96
