"""A hygroscopic load takes up water from moister air, and gives it off to drier."""

from __future__ import annotations

from envcorr.effect import Check, Effect, Way
from envcorr.estimate import Estimate, Value
from envcorr.laws import moisture
from envcorr.vocabulary import Assumed, Quantity

__all__ = ["EFFECT", "load"]

_TARE_HUMIDITY = {"tare.air.humidity", "tare.air.dew_point", "tare.air.wet_bulb"}


def load(load_uptake: Value) -> Value:
    """Return the water that the load has taken up until the loaded reading [kg]; negative where it has dried."""
    return load_uptake


def _by_isotherm(
    load_mass: Value,
    load_isotherm_slope: Value,
    load_humidity_step: Value,
    cycle_duration: Value,
    load_uptake_time: Value,
    load_uptake_factor: Value,
) -> Value:
    taken_up = moisture.sorbed_mass(
        load_mass, load_isotherm_slope, load_humidity_step, cycle_duration, load_uptake_time
    )
    return load_uptake_factor * taken_up


EFFECT = Effect(
    name="hygroscopic_uptake",
    title="water taken up by the load",
    help="A load that is drier than the air around it gains mass while it is weighed, a moister one loses.",
    source="linear driving force: Glueckauf, Trans. Faraday Soc. 51 (1955) 1540; or a measured rate",
    load=load,
    correctable=True,  # with an isotherm the model's factor stays
    treatment="acclimatise it to the air of the balance, or weigh it in a closed container",
    leaves="what the humidity does within a weighing",
    quantities=(
        Quantity(
            "load.uptake_rate",
            "mass rate",
            "rate of uptake",
            "Measured on the balance, as the drift of the reading; negative where the load loses mass.",
            low=-1e-3,  # 1 g/s: only misprints lie outside (judgement)
            high=1e-3,
            example="20 µg/min",
        ),
        Quantity(
            "load.isotherm_slope",
            "fraction",
            "slope of the sorption isotherm",
            "Water taken up per mass of the load over the whole range of humidity, 0 to 100 %: 0.1 is 1 mg per gram "
            "for each percent of humidity.",
            low=0.0,
            high=20.0,
            varies="never",
            example="0.1",
        ),
        Quantity(
            "load.uptake_time",
            "time",
            "time constant of uptake",
            "Time in which the load, as it lies there, comes 63 % of the way to the new humidity.",
            low=0.01,
            varies="never",
            example="20 min",
        ),
        Quantity(
            "load.kept_at_humidity",
            "fraction",
            "relative humidity at which the load was kept",
            "Until it came into the open, where the load or its surface has had time to settle: 0 over a desiccant. "
            "What counts as its mass is what it weighs in that state; cycle.duration then counts from the opening.",
            low=0.0,
            high=1.0,
            example="10 %",
        ),
        Quantity(
            "load.uptake_factor",
            "number",
            "model factor of uptake",
            "How far the true uptake may lie from that of the isotherm and one time constant.",
            low=0.01,
            high=100.0,
            varies="never",
            default=Assumed(Estimate.between(0.5, 2.0, "log-uniform"), "a factor of 2 either way (judgement)"),
        ),
        Quantity(
            "load.humidity_step",
            "fraction",
            "change of humidity that the load has met",
            "Relative humidity of the air less that to which the load had settled.",
            internal=True,
        ),
        Quantity("load.uptake", "mass", "water taken up", "Until the loaded reading.", internal=True),
    ),
    ways=(
        Way(
            "load.humidity_step",
            lambda air_relative_humidity, load_kept_at_humidity: air_relative_humidity - load_kept_at_humidity,
            "the air's less that at which it was kept",
        ),
        Way(
            "load.humidity_step",
            lambda cycle_humidity_change: cycle_humidity_change,
            "the change within a weighing, all at once after the tare",
        ),
        Way(
            "load.humidity_step",
            lambda air_relative_humidity, tare_air_relative_humidity: (
                air_relative_humidity - tare_air_relative_humidity
            ),
            "loaded less tare reading, all at once after the tare",
            only_if=lambda given: not _TARE_HUMIDITY.isdisjoint(given),
        ),
        Way(
            "load.uptake",
            lambda load_uptake_rate, cycle_duration: load_uptake_rate * cycle_duration,
            "a measured rate times the duration",
        ),
        Way(
            "load.uptake",
            _by_isotherm,
            "isotherm and time constant",
            source="Glueckauf, Trans. Faraday Soc. 51 (1955) 1540",
            checks=(
                Check(
                    # Crank (4.18): a slab is at 0.20 where this is at 0.095 (computed)
                    lambda cycle_duration, load_uptake_time: cycle_duration < load_uptake_time / 10,
                    "{cycle_duration} is less than a tenth of the time constant of uptake ({load_uptake_time}): where "
                    "the water has to diffuse into the load, it begins more than twice as fast as computed here. "
                    "Measure the rate on the balance and give it as load.uptake_rate.",
                    source="Crank, The Mathematics of Diffusion, 2nd ed., (4.18): a slab (the number from memory)",
                ),
            ),
        ),
    ),
    checks=(
        Check(
            lambda load_uptake, target_resolution, target_within: abs(load_uptake) > target_within * target_resolution,
            "The water that the load takes up or gives off may be more than the target allows. Weigh it closed, or "
            "read at several times and go back to the moment of opening.",
            source="the uptake against the share of the target left to the surroundings",
        ),
    ),
    test="Leave it on the balance and read every half minute: a reading that creeps towards a limit is uptake.",
    caution=(
        "Some solids react with water, even with the air's, and give heat or flammable gas (alkali metals, hydrides, "
        "some chlorides): keep them closed under dry gas, and do not raise the humidity near them. Follow the "
        "safety data sheet, local codes and licensed practice."
    ),
)
