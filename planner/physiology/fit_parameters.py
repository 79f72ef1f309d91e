"""The constants of the population model: meaning, unit, prior and source of each.

What is fitted has a prior with a spread; what is chosen is a judgement and stays as it is.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final


@dataclass(frozen=True)
class Parameter:
    """A constant of the model with its prior; a prior_sd of 0 means that it is chosen, not fitted."""

    name: str
    meaning: str
    unit: str
    prior: float
    prior_sd: float
    kind: str
    source: str


def _fitted(name: str, meaning: str, unit: str, prior: float, prior_sd: float, source: str) -> Parameter:
    return Parameter(name, meaning, unit, prior, prior_sd, "computed", f"fitted; prior: {source}")


def _chosen(name: str, meaning: str, unit: str, value: float, source: str) -> Parameter:
    return Parameter(name, meaning, unit, value, 0.0, "judgement", source)


PARAMETERS: Final = (
    _fitted(
        "sea_level_paco2_mmhg", "PaCO2 awake at rest at sea level", "mmHg", 40.0, 1.0, "textbook, from memory"
    ),
    _fitted(
        "paco2_fall_per_mmhg",
        "fall of PaCO2, once acclimatised, for each mmHg of inspired oxygen missing, over sea level's PaCO2",
        "1/mmHg",
        0.005,
        0.001,
        "wide, judgement",
    ),
    _fitted(
        "acute_asymptote_mmhg",
        "inspired oxygen at which the whole response would come at once",
        "mmHg",
        56.0,
        3.0,
        "32 mmHg in the alveoli (Weil 1970, from memory) and about 22 mmHg of PaCO2 there: judgement",
    ),
    _fitted(
        "acute_half_mmhg",
        "inspired oxygen above the asymptote at which half of the response comes at once",
        "mmHg",
        5.0,
        2.0,
        "judgement: about a quarter of the response at once at 4300 m",
    ),
    _fitted("rise_time_d", "time constant of acclimatisation", "d", 5.5, 1.0, "4 to 7 days, published"),
    _chosen(
        "fall_time_d",
        "time constant of its loss",
        "d",
        22.0,
        "cautious middle of 20 to 25 days; Beidleman 1997, Med Sci Sports Exerc 29:1588, found less loss",
    ),
    _fitted(
        "venous_admixture_pct",
        "saturation lost to venous admixture at rest",
        "points",
        1.0,
        0.3,
        "a shunt of 3 to 5 % times 25 points of extraction, textbook, from memory",
    ),
    _fitted(
        "respiratory_quotient",
        "carbon dioxide given off over oxygen taken up",
        "1",
        0.85,
        0.02,
        "0.8 to 0.85 at rest on a mixed diet, published",
    ),
    _fitted(
        "quotient_rise",
        "its rise while breathing is still answering, for each unit of ventilation not yet acquired",
        "1",
        0.15,
        0.1,
        "carbon dioxide washed out and more sugar burnt in the first days aloft: 0.03 to 0.1, from memory",
    ),
    _fitted(
        "chronic_buffering",
        "fall of bicarbonate for each mmHg of PaCO2 lastingly lost",
        "mmol/L per mmHg",
        0.45,
        0.05,
        "4 to 5 mmol/L per 10 mmHg in chronic respiratory alkalosis, textbook, from memory",
    ),
    _fitted("sleep_paco2_rise_mmhg", "rise of PaCO2 in sleep", "mmHg", 3.5, 1.0, "3 to 5 mmHg, from memory"),
    _fitted(
        "breathing_sd",
        "spread of the breathing response between people, of its logarithm",
        "1",
        0.4,
        0.1,
        "judgement: the acute response alone differs by 80 % (published), all of breathing by less",
    ),
    _fitted(
        "setpoint_sd_mmhg",
        "how much lower PaCO2 is at sea level for each standard deviation of stronger breathing",
        "mmHg",
        1.5,
        0.5,
        "judgement: people's PaCO2 at sea level differs by about 2 mmHg, some of it from day to day",
    ),
    _fitted(
        "admixture_sd_pct", "spread of the venous admixture between people", "points", 0.6, 0.2, "judgement"
    ),
    _chosen(
        "day_alveolar_sd_mmhg",
        "spread of one person's alveolar oxygen from day to day",
        "mmHg",
        1.0,
        "judgement: about 1 mmHg of PaCO2",
    ),
    _chosen(
        "day_sd_pct", "spread of one person's saturation from day to day besides", "points", 0.4, "judgement"
    ),
    _chosen(
        "device_bias_sd_pct",
        "spread of an oximeter's bias on one person",
        "points",
        1.0,
        "judgement, within the accuracy of 2 that makers state and of 4 that ISO 80601-2-61 allows",
    ),
    _chosen(
        "oximeter_noise_sd_pct",
        "spread of repeated readings near sea level's saturation, rounding included",
        "points",
        0.7,
        "judgement, as the bias",
    ),
    _chosen(
        "oximeter_noise_slope",
        "growth of that spread for each point of saturation lost",
        "1",
        0.05,
        "judgement: oximeters are worst below 80 % (FDA 2021)",
    ),
    _chosen(
        "faulty_share",
        "share of readings that tell nothing: a cold finger, a typing error",
        "1",
        0.02,
        "judgement",
    ),
)
