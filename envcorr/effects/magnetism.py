"""Magnetism: a stray field pulls at a magnetic load, or a magnetic load at the balance."""

from __future__ import annotations

from envcorr.constants import STANDARD_GRAVITY
from envcorr.effect import Check, Effect
from envcorr.estimate import Value
from envcorr.laws import magnetism
from envcorr.vocabulary import Choice, Quantity

__all__ = ["EFFECT", "load"]

_LIMITS = "OIML R 111-1:2004, tables 3 and 4 (from memory)"


def load(
    load_magnetic_susceptibility: Value,
    load_polarisation: Value,
    load_volume: Value,
    bench_magnetic_field: Value,
    bench_magnetic_gradient: Value,
) -> Value:
    """Return the pull of the field on the load, induced and permanent [kg]."""
    induced = magnetism.induced_force(
        load_magnetic_susceptibility, load_volume, bench_magnetic_field, bench_magnetic_gradient
    )
    permanent = magnetism.permanent_force(load_polarisation, load_volume, bench_magnetic_gradient)
    return (induced + permanent) / STANDARD_GRAVITY.value


def _beyond(name: str) -> Check:
    susceptibility, polarisation = magnetism.CLASSES[name]
    return Check(
        lambda load_magnetic_susceptibility, load_polarisation: (
            (abs(load_magnetic_susceptibility) > susceptibility) | (abs(load_polarisation) > polarisation)
        ),
        "The load is more magnetic ({load_magnetic_susceptibility}; {load_polarisation}) than a weight of class "
        f"{name} may be ({susceptibility:g}; {1e6 * polarisation:g} µT).",
        source=_LIMITS,
        level="info",
    )


EFFECT = Effect(
    name="magnetism",
    title="magnetism",
    help="A magnetic load is pulled by stray fields, the balance's own magnet among them.",
    source="force on a dipole in a gradient (physics); limits of weights: " + _LIMITS,
    load=load,
    needed="load.magnetic",
    treatment="raise it from the balance on a spacer, or demagnetise it",
    leaves="what the field still is at that height",
    choices=(
        Choice(
            "load.magnetic",
            "whether the load or anything in it is magnetic",
            {"yes": "steel, nickel, ferrite, a stirring bar", "no": "nothing that a magnet draws"},
            notes={
                "yes": "A magnetic load, or a stirring bar in it, pulls at the balance's iron and at its magnet, and "
                "reads heavy or light by its side and place. Take the bar out, or weigh on a spacer of 10 cm and "
                "more, and turn the load over: a reading that changes was magnetic."
            },
        ),
    ),
    quantities=(
        Quantity(
            "load.magnetic_susceptibility",
            "number",
            "magnetic susceptibility of the load",
            "Volume susceptibility: 0.004 of an austenitic steel, 0.00002 of aluminium.",
            low=-1.0,
            high=10.0,
            varies="never",
            lessens_to_zero=True,
            example="0.004",
        ),
        Quantity(
            "load.polarisation",
            "magnetic field",
            "polarisation of the load",
            "Permanent magnetisation, as mu0 M along the vertical; its side is rarely known.",
            low=-2.0,
            high=2.0,
            limit=True,
            example="5 µT",
        ),
        Quantity(
            "bench.magnetic_field",
            "magnetic field",
            "vertical magnetic field at the load",
            "The Earth's is about 50 µT; the balance's own stray field comes on top.",
            low=-1.0,
            high=1.0,
            lessens_to_zero=True,
            example="50 µT",
        ),
        Quantity(
            "bench.magnetic_gradient",
            "magnetic field gradient",
            "vertical gradient of the field at the load",
            "How fast it changes with height, over the load; a bound, read as ±.",
            low=-100.0,
            high=100.0,
            limit=True,
            example="1 mT/m",
        ),
    ),
    checks=tuple(_beyond(name) for name in ("E2", "F2")),
    test="Weigh it, turn it over and weigh again; then on a spacer of 10 cm.",
    caution="Strong magnets: keep implants (pacemakers), cards and instruments away; follow local rules.",
)
