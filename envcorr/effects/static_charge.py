"""Static charge: the pull between a charged load and what is fixed to the housing."""

from __future__ import annotations

import numpy as np

from envcorr.constants import AIR_BREAKDOWN_FIELD, STANDARD_GRAVITY, VACUUM_PERMITTIVITY
from envcorr.effect import Answer, Check, Effect, Way
from envcorr.estimate import Estimate, Value
from envcorr.laws import electrostatics
from envcorr.vocabulary import Assumed, Choice, Quantity

__all__ = ["EFFECT", "handling_voltage", "load"]

_G = STANDARD_GRAVITY.value
_EPS0 = VACUUM_PERMITTIVITY.value
_HANDBOOK = "DOD-HDBK-263 (1980), table of typical voltages (from memory)"

# volts at 10 to 20 % and at 65 to 90 % relative humidity; the middles of those ranges are 15 % and 77.5 %
_VOLTAGES = {
    "bench work": (6000.0, 100.0),
    "lifting a plastic bag": (20000.0, 1200.0),
    "walking on carpet": (35000.0, 1500.0),
}
_DRY, _HUMID = 0.15, 0.775


def load(static_pull: Value, static_sense: Value, static_screening: Value) -> Value:
    """Return the error of the static pull [kg]: down to a fixed floor reads heavy, up to a roof light."""
    return static_sense * (1 - static_screening) * static_pull


def handling_voltage(activity: str, humidity: Value) -> Value:
    """Return a typical voltage [V] of handling at a relative humidity (0..1), log-linear between the handbook's two."""
    dry, humid = _VOLTAGES[activity]
    part = np.clip((humidity - _DRY) / (_HUMID - _DRY), 0.0, 1.0)
    return dry * (humid / dry) ** part


def _handled(activity: str) -> Way:
    def voltage(air_relative_humidity: Value, static_voltage_share: Value) -> Value:
        return static_voltage_share * handling_voltage(activity, air_relative_humidity)

    return Way(
        "static.potential",
        voltage,
        f"as after {activity}",
        source=_HANDBOOK,
        when={"static.handling": (activity,)},
    )


def _quantity(name: str, kind: str, label: str, text: str, low: float = -np.inf, high: float = np.inf) -> Quantity:
    return Quantity(f"static.{name}", kind, label, text, low=low, high=high)


EFFECT = Effect(
    name="static_charge",
    title="static charge",
    help="Forces between load and pan are internal; what shows is the pull to what is fixed to the housing.",
    source="image charge and Maxwell's stress: Jackson, Classical Electrodynamics, 2.1 and 1.11",
    load=load,
    needed="load.insulating",
    treatment="neutralise it",
    leaves="what charges again in handling",
    test="Neutralise and weigh again: a reading that changes was charged.",
    caution=(
        "Ionisers carry high voltage and make ozone, and are an ignition source near flammable vapour; radioactive "
        "ones need "
        "a licence. Follow local codes and licensed practice."
    ),
    choices=(
        Choice(
            "static.direction",
            "where the pull goes to",
            {
                "floor": "down, to a fixed plate below: reads heavy",
                "roof": "up, to the roof of the draught shield: reads light",
                "unknown": "either way",
            },
            default="unknown",
            source="either way",
        ),
        Choice(
            "static.handling",
            "what charged the load",
            {activity: f"{dry:g} V in dry, {humid:g} V in humid air" for activity, (dry, humid) in _VOLTAGES.items()},
            source=_HANDBOOK,
        ),
    ),
    quantities=(
        # bounds far beyond what air holds off (3 MV/m) or a bench can have: only misprints lie outside (judgement)
        _quantity("charge", "charge", "charge of the load", "Net charge on the load or its container.", -1e-3, 1e-3),
        _quantity(
            "distance", "length", "distance to the fixed plate", "From the charge to the earthed plate.", 1e-5, 1.0
        ),
        _quantity(
            "surface_charge",
            "surface charge",
            "surface charge",
            "Charge per area of a sheet, film or vial wall.",
            -1e-2,
            1e-2,
        ),
        _quantity("area", "area", "charged area", "Area that faces the fixed plate.", 1e-10, 1.0),
        _quantity(
            "field", "electric field", "electric field", "Field measured between the load and the housing.", -1e9, 1e9
        ),
        _quantity(
            "potential", "potential", "potential of the load", "Voltage of the load against the housing.", -1e7, 1e7
        ),
        _quantity("radius", "length", "radius of a charged ball", "Of a conducting, insulated load.", 1e-5, 0.5),
        _quantity("roof_height", "length", "height of the roof above the pan", "Of the draught shield.", 1e-3, 2.0),
        Quantity(
            "static.screening",
            "fraction",
            "share of the pull that is screened",
            "By an earthed pan, cage or screen between load and housing.",
            low=0.0,
            high=1.0,
            default=Assumed(Estimate(0.0), "no screen"),
        ),
        Quantity(
            "static.unknown_surface_charge",
            "surface charge",
            "surface charge of an unknown insulating load",
            "Magnitude; taken where the load is insulating and nothing else was said.",
            low=-1e-2,
            high=1e-2,
            default=Assumed(
                Estimate.between(1e-7, 1e-5, "log-uniform"), "0.1 to 10 µC/m², an unknown insulating vial (judgement)"
            ),
        ),
        Quantity(
            "static.voltage_share",
            "fraction",
            "share of the handling voltage that the load keeps",
            "The handbook's voltages are those of people and bags.",
            low=0.0,
            high=1.0,
            default=Assumed(Estimate.between(0.1, 1.0, "log-uniform"), "a tenth to all of it (judgement)"),
        ),
        Quantity(
            "static.pull",
            "mass",
            "size of the static pull",
            "Without its direction and its screen.",
            internal=True,
        ),
        Quantity(
            "static.sense",
            "number",
            "direction of the static pull",
            "1 down, -1 up.",
            internal=True,
        ),
        Quantity(
            "static.coin",
            "number",
            "direction of the static pull, where it is not known",
            "Down where it is positive, up where it is negative.",
            default=Assumed(Estimate(0.0, "rectangular", 1.0), "either way with the same chance"),
            internal=True,
            ranked=False,
        ),
    ),
    ways=(
        Way("static.sense", lambda: 1.0, "down to the floor", when={"static.direction": ("floor",)}),
        Way("static.sense", lambda: -1.0, "up to the roof", when={"static.direction": ("roof",)}),
        Way(
            "static.sense",
            lambda static_coin: np.sign(static_coin),
            "either way",
            when={"static.direction": ("unknown",)},
        ),
        *(_handled(activity) for activity in _VOLTAGES),
        Way(
            "static.surface_charge",
            lambda static_unknown_surface_charge: static_unknown_surface_charge,
            "that of an unknown insulating load",
            when={"load.insulating": ("yes",)},
        ),
        Way(
            "static.pull",
            lambda static_field, static_area: electrostatics.field_pressure(static_field) * static_area / _G,
            "a measured field over an area",
            source="Maxwell's stress",
        ),
        Way(
            "static.pull",
            lambda static_charge, static_radius, static_distance: (
                electrostatics.sphere_force_with_charge(static_radius, static_distance, static_charge) / _G
            ),
            "a charged ball over an earthed plate",
            source="exact image series; Smythe, Static and Dynamic Electricity, 5.08",
        ),
        Way(
            "static.pull",
            lambda static_charge, static_distance: (
                electrostatics.point_charge_force(static_charge, static_distance) / _G
            ),
            "a point charge over an earthed plate",
            source="Jackson, Classical Electrodynamics, 2.1",
        ),
        Way(
            "static.pull",
            lambda static_potential, static_area, static_distance: (
                electrostatics.field_pressure(static_potential / static_distance) * static_area / _G
            ),
            "a voltage across a gap",
            source="Maxwell's stress",
        ),
        Way(
            "static.pull",
            lambda static_surface_charge, static_area, static_distance, static_roof_height: (
                electrostatics.sheet_under_roof_force(
                    static_surface_charge, static_area, static_distance, static_roof_height
                )
                / _G
            ),
            "a charged sheet over an earthed pan, under a roof",
            source="Maxwell's stress; the pan screens the floor",
        ),
        Way(
            "static.pull",
            lambda static_surface_charge, static_area: (
                electrostatics.sheet_pressure(static_surface_charge) * static_area / _G
            ),
            "a charged sheet, its field on one side",
            source="Maxwell's stress",
        ),
    ),
    answers=(
        Answer(
            "largest charge that can be borne at this distance",
            "charge",
            lambda target_resolution, target_within, static_distance: electrostatics.point_charge_for_force(
                target_within * target_resolution * _G, static_distance
            ),
        ),
        Answer(
            "largest surface charge that can be borne on this area",
            "surface charge",
            lambda target_resolution, target_within, static_area: np.sqrt(
                2 * _EPS0 * target_within * target_resolution * _G / static_area
            ),
        ),
    ),
    checks=(
        Check(
            lambda static_pull, static_screening, target_resolution, target_within: (
                (1 - static_screening) * static_pull > target_within * target_resolution
            ),
            "The static pull may be larger than the target allows. It cannot be corrected for: neutralise and weigh "
            "again.",
            source="a band, not a correction: charge is neither steady nor known",
        ),
        Check(
            lambda static_surface_charge: np.abs(static_surface_charge) > electrostatics.breakdown_surface_charge(2),
            "A surface charge of {static_surface_charge} is more than air can hold (53 µC/m² on a free sheet): it "
            "would have "
            "sparked over.",
            source="breakdown of air at 3 MV/m over gaps of 1 cm and more (from memory)",
        ),
        Check(
            lambda static_field: np.abs(static_field) > AIR_BREAKDOWN_FIELD.value,
            "A field of {static_field} is more than air can hold (3 MV/m): check the field meter's distance.",
            source="breakdown of air at 3 MV/m over gaps of 1 cm and more (from memory)",
        ),
        Check(
            # the field of a charge and its image at the plate is 2 q/(4 pi eps0 d²)
            lambda static_charge, static_distance: (
                np.abs(static_charge) / (2 * np.pi * _EPS0 * static_distance**2) > AIR_BREAKDOWN_FIELD.value
            ),
            "{static_charge} at {static_distance} from the plate would be more than air can hold (3 MV/m at the "
            "plate).",
            source="image charge; breakdown of air at 3 MV/m over gaps of 1 cm and more (from memory)",
        ),
    ),
)
