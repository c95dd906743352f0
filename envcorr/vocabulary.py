"""The vocabulary: what a quantity and a choice are, and those that several effects share.

A quantity is named once: ``load.density`` in a set-up file, on the command line and in JSON is ``load_density``
as a keyword in Python. Quantities that only one effect uses live in that effect's file.

``tare.X`` and ``adjusted.X`` are the quantity X at the tare reading and at the adjustment of the balance.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

from envcorr.constants import ZERO_CELSIUS
from envcorr.estimate import Estimate

__all__ = [
    "MOMENTS",
    "PRESENT",
    "QUANTITIES",
    "TARGET",
    "Assumed",
    "Choice",
    "Moment",
    "Quantity",
    "Varies",
]

Moment = Literal["", "tare", "adjusted"]
PRESENT: Moment = ""
MOMENTS: tuple[Moment, ...] = (PRESENT, "tare", "adjusted")

Varies = Literal["each reading", "each weighing", "never"]
_HARMLESS_AT_ZERO = frozenset(
    {"angle", "charge", "electric field", "potential", "surface charge", "temperature difference", "mass rate"}
)
"""Kinds of quantities of which nothing at all is best."""


@dataclass(frozen=True, slots=True)
class Assumed:
    """What is taken where nothing was given, and on whose word."""

    estimate: Estimate
    source: str


@dataclass(frozen=True, slots=True)
class Quantity:
    """A named number with a unit.

    ``kind`` names the units it accepts (:mod:`envcorr.units`); ``low`` and ``high`` [SI] are the bounds of physics,
    ``usual`` [SI] the range outside which ``hint`` says what may have been meant. ``varies`` says whether a repeat
    draws it anew. A ``limit`` that is given bare is an unsigned bound: rectangular about zero. An ``internal``
    quantity (a formula's own error, a unit of noise) is drawn, never given. A ``computed`` one may be given but usually
    follows from others, so those are asked for where it is lacking. ``example`` is a text
    that it could be given by. One that is not ``ranked`` has no best estimate worth knowing (the side a coin falls on).
    One that is ``harmless_at_zero`` (a charge, a tilt, a repeatability) is bettered by being smaller, any other by
    being held or known better.
    """

    name: str
    kind: str
    label: str
    help: str
    low: float = -math.inf
    high: float = math.inf
    usual: tuple[float, float] = (-math.inf, math.inf)
    hint: str = ""
    varies: Varies = "each weighing"
    limit: bool = False
    default: Assumed | None = None
    internal: bool = False
    computed: bool = False
    example: str = ""
    ranked: bool = True
    lessens_to_zero: bool = False

    @property
    def harmless_at_zero(self) -> bool:
        """Whether nothing at all is best."""
        return self.limit or self.lessens_to_zero or self.kind in _HARMLESS_AT_ZERO

    @property
    def parameter(self) -> str:
        """The name as a Python keyword."""
        return self.name.replace(".", "_")


@dataclass(frozen=True, slots=True)
class Choice:
    """A named word out of a few; it guards ways and effects, never a branch in a formula.

    ``default`` is what counts where nothing was said ("" for: not said); ``options`` maps each word to its meaning.
    ``refused`` maps a word that people use to the reason why it cannot be used here; ``notes`` a word to what to mind
    where it was chosen.
    """

    name: str
    label: str
    options: dict[str, str]
    default: str = ""
    source: str = ""
    refused: dict[str, str] | None = None
    notes: dict[str, str] | None = None


_K0 = ZERO_CELSIUS.value

QUANTITIES: tuple[Quantity, ...] = (
    # what was read --------------------------------------------------------------------------------------------
    Quantity(
        "reading",
        "mass",
        "net reading",
        "What the display shows of the load alone.",
        low=-100.0,
        high=100.0,
        example="1.25000 g",
    ),
    Quantity(
        "gross",
        "mass",
        "gross reading",
        "What the display shows of load and container.",
        low=-100.0,
        high=100.0,
        example="31.25 g",
    ),
    Quantity(
        "tare",
        "mass",
        "tare reading",
        "What the display shows of the container alone.",
        low=-100.0,
        high=100.0,
        example="30 g",
    ),
    # air: what the room does -------------------------------------------------------------------------------
    Quantity(
        "air.temperature",
        "temperature",
        "air temperature",
        "Temperature of the air around the load.",
        low=_K0 - 60,  # far outside both air formulas: refused (judgement; CoolProp's humid air starts at -143 °C)
        high=_K0 + 100,
        usual=(_K0 + 5, _K0 + 40),
        hint="Was it written in °F? Then write the unit: 68 °F is 20 °C.",
    ),
    Quantity(
        "air.pressure",
        "pressure",
        "air pressure",
        "Pressure of the air at the balance itself (station pressure), not reduced to sea level.",
        low=1e4,  # 100 hPa; far outside both air formulas (judgement)
        high=2e5,
        usual=(6e4, 1.1e5),  # the range of CIPM-2007, section 3
        hint="Was it written in kPa or mmHg? Then write that unit: 101.3 kPa and 760 mmHg are 1013 hPa.",
    ),
    Quantity(
        "air.sea_level_pressure",
        "pressure",
        "air pressure reduced to sea level",
        "What a weather service reports; it is converted with air.altitude (ISO 2533).",
        low=8.7e4,  # the lowest and highest ever observed are about 870 and 1085 hPa (from memory)
        high=1.09e5,
    ),
    Quantity(
        "air.altitude",
        "length",
        "altitude",
        "Height of the balance above sea level; also used to check the station pressure.",
        low=-500.0,
        high=9000.0,
        varies="never",
        example="620 m",
    ),
    Quantity(
        "air.humidity",
        "fraction",
        "relative humidity",
        "Relative humidity of the air around the load.",
        low=0.0,
        high=1.0,
        usual=(0.05, 1.0),
        hint="Was it a fraction? 0.45 without the percent sign is 45 %.",
    ),
    Quantity(
        "air.dew_point",
        "temperature",
        "dew point",
        "Dew-point temperature of the air, instead of the relative humidity.",
        low=_K0 - 80,
        high=_K0 + 100,
        example="9 °C",
    ),
    Quantity(
        "air.wet_bulb",
        "temperature",
        "wet-bulb temperature",
        "Temperature of a ventilated wet-bulb thermometer, instead of the relative humidity.",
        low=_K0 - 20,
        high=_K0 + 100,
        example="15 °C",
    ),
    Quantity(
        "air.co2",
        "fraction",
        "CO2 content",
        "Mole fraction of carbon dioxide in the air.",
        low=0.0,
        high=0.05,
        usual=(0.0003, 0.01),
        hint="400 ppm is the open air.",
        default=Assumed(Estimate.between(4e-4, 8e-4), "an occupied room, 400 to 800 ppm (common practice, no source)"),
        example="500 ppm",
    ),
    Quantity(
        "air.density",
        "density",
        "air density",
        "Density of the air around the load, where it is known directly.",
        low=0.05,
        high=10.0,
        usual=(0.6, 1.5),
        computed=True,
        example="1.19 kg/m³",
    ),
    # cycle: one net weighing, from the tare reading to the loaded reading ------------------------------------
    Quantity(
        "cycle.duration",
        "time",
        "duration of a weighing",
        "Time from the tare reading to the loaded reading.",
        low=0.0,
        varies="never",
    ),
    Quantity(
        "cycle.repeats",
        "number",
        "number of repeats",
        "How many net weighings are averaged into one result.",
        low=1.0,
        high=200.0,
        varies="never",
        default=Assumed(Estimate(1.0), "one weighing, one result"),
    ),
    Quantity(
        "cycle.temperature_change",
        "temperature difference",
        "change of air temperature within a weighing",
        "Air temperature at the loaded reading less that at the tare reading.",
        low=-50.0,
        high=50.0,
        limit=True,
        example="0.2 K",
    ),
    Quantity(
        "cycle.pressure_change",
        "pressure",
        "change of air pressure within a weighing",
        "Air pressure at the loaded reading less that at the tare reading.",
        low=-1e4,
        high=1e4,
        limit=True,
        example="0.1 hPa",
    ),
    Quantity(
        "cycle.humidity_change",
        "fraction",
        "change of relative humidity within a weighing",
        "Relative humidity at the loaded reading less that at the tare reading.",
        low=-1.0,
        high=1.0,
        limit=True,
        example="1 %",
    ),
    # adjusted: the adjustment of the balance -----------------------------------------------------------------
    Quantity(
        "adjusted.temperature_change",
        "temperature difference",
        "air temperature at the adjustment, from the present one",
        "How far the air temperature at the adjustment may lie from the present one, where it is not known.",
        low=-50.0,
        high=50.0,
        varies="never",
        limit=True,
        default=Assumed(Estimate(0.0, "rectangular", 3.0), "±3 K, the air at the adjustment being unknown (judgement)"),
    ),
    Quantity(
        "adjusted.pressure_change",
        "pressure",
        "air pressure at the adjustment, from the present one",
        "How far the air pressure at the adjustment may lie from the present one, where it is not known.",
        low=-1e4,
        high=1e4,
        varies="never",
        limit=True,
        default=Assumed(
            Estimate(0.0, "rectangular", 2500.0),
            "±25 hPa, the air at the adjustment being unknown (judgement)",
        ),
    ),
    # balance -------------------------------------------------------------------------------------------------
    Quantity(
        "balance.max_capacity",
        "mass",
        "maximum capacity",
        "The largest load that the balance takes, container included (Max, OIML R 76-1).",
        low=1e-6,
        varies="never",
        example="220 g",
    ),
    Quantity(
        "balance.scale_interval",
        "mass",
        "scale interval d",
        "The step of the display (readability, OIML R 76-1).",
        low=1e-12,
        high=0.1,
        varies="never",
        example="0.1 mg",
    ),
    Quantity(
        "balance.repeatability",
        "mass",
        "repeatability s",
        "Standard deviation of repeated displayed net weighings.",
        low=0.0,
        high=1.0,
        varies="never",
        lessens_to_zero=True,
        example="0.1 mg",
    ),
    Quantity(
        "balance.scatter_on",
        "mass",
        "scatter with the disturbance on",
        "Standard deviation of net weighings with a disturbance (hood, fan, pump) switched on.",
        low=0.0,
        varies="never",
        lessens_to_zero=True,
    ),
    Quantity(
        "balance.scatter_off",
        "mass",
        "scatter with the disturbance off",
        "Standard deviation of the same net weighings with the disturbance switched off.",
        low=0.0,
        varies="never",
    ),
    Quantity(
        "balance.adjusting_weight_density",
        "density",
        "density of the adjusting weight",
        "Density of the weight with which the balance is adjusted, built-in or external.",
        low=500.0,
        high=23000.0,
        varies="never",
        default=Assumed(Estimate(8000.0), "8000 kg/m³, the reference density of OIML D 28"),
    ),
    # load and container --------------------------------------------------------------------------------------
    Quantity(
        "load.mass",
        "mass",
        "net mass of the load",
        "True mass of what is weighed, without its container.",
        low=1e-12,  # as the target's resolution; nothing at all is not weighed
        high=100.0,
        varies="never",
        example="5 g",
    ),
    Quantity(
        "load.density",
        "density",
        "density of the load",
        "Density of the sample; load.density_kind says which density it is.",
        low=0.5,
        high=23000.0,
        usual=(2.0, 22700.0),
        hint="Was it written in g/cm³? Then write that unit.",
        varies="never",
    ),
    Quantity(
        "load.expansion",
        "relative per temperature",
        "cubic expansion coefficient of the load",
        "How its volume grows with its temperature; its density falls as much from load.density_temperature on.",
        low=-1e-3,
        high=1e-2,
        varies="never",
        example="200 ppm/K",
    ),
    Quantity(
        "load.density_temperature",
        "temperature",
        "temperature at which the load's density holds",
        "At which load.density was found; it counts where load.expansion is given.",
        low=100.0,
        high=600.0,
        varies="never",
        default=Assumed(Estimate(293.15), "20 °C, the reference temperature of OIML R 111-1:2004, B.7"),
        example="20 °C",
    ),
    Quantity(
        "load.volume",
        "volume",
        "volume of the load",
        "The volume of air that the sample displaces, where it is known directly.",
        low=1e-17,  # below that of the smallest mass at the largest density
        high=1.0,
        varies="never",
        computed=True,
        example="5 mL",
    ),
    Quantity(
        "load.open_cell_fraction",
        "fraction",
        "share of open cells",
        "The share of a foam's gas volume that is open to the surrounding air.",
        low=0.0,
        high=1.0,
        varies="never",
    ),
    Quantity(
        "load.solid_density",
        "density",
        "density of the solid in a foam",
        "Density of the cell walls, for an envelope density with open cells.",
        low=100.0,
        high=23000.0,
        varies="never",
    ),
    Quantity(
        "container.mass",
        "mass",
        "mass of the container",
        "Mass of the empty container (the tare).",
        low=0.0,
        high=100.0,
        varies="never",
        example="30 g",
    ),
    Quantity(
        "container.density",
        "density",
        "density of the container's material",
        "Density of the material that the container is made of.",
        low=5.0,
        high=23000.0,
        varies="never",
    ),
    Quantity(
        "container.inner_volume",
        "volume",
        "inner volume of the container",
        "Volume of what the empty container encloses.",
        low=0.0,
        high=1.0,
        varies="never",
    ),
    Quantity(
        "container.outer_volume",
        "volume",
        "outer volume of the container",
        "Volume of air that the closed container displaces.",
        low=0.0,
        high=1.0,
        varies="never",
    ),
)

TARGET: tuple[Quantity, ...] = (
    Quantity(
        "target.resolution",
        "mass",
        "target resolution",
        "The smallest difference of mass that the weighing is to support.",
        low=1e-12,
        high=1.0,
        varies="never",
    ),
    Quantity(
        "target.within",
        "fraction",
        "share of the resolution left to the surroundings",
        "The surroundings must stay within this share of the target resolution.",
        low=0.01,
        high=1.0,
        varies="never",
        default=Assumed(Estimate(0.5), "half a step of the target resolution (judgement)"),
        example="0.5",
    ),
    Quantity(
        "target.probability",
        "fraction",
        "probability to be met",
        "The probability with which the error must stay within its bound.",
        low=0.5,
        high=0.999,
        varies="never",
        default=Assumed(Estimate(0.95), "95 %, usual for expanded uncertainty (JCGM 100, 6.3.3)"),
        example="95 %",
    ),
    Quantity(
        "target.relative_accuracy",
        "fraction",
        "demanded relative accuracy",
        "The largest error as a share of the net mass, for the minimum weight.",
        low=1e-7,
        high=0.5,
        varies="never",
        default=Assumed(Estimate(0.001), "0.10 % (USP <41>, from memory)"),
        example="0.1 %",
    ),
)
