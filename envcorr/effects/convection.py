"""Natural convection: air that a warm load heats rises along it and lifts it, along a cold one it sinks."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np

from envcorr.effect import Check, Effect, Way
from envcorr.estimate import Estimate, Value
from envcorr.laws import heat
from envcorr.vocabulary import Assumed, Quantity

__all__ = ["EFFECT", "load"]


def load(load_convection: Value, tare_load_convection: Value, load_convection_factor: Value) -> Value:
    """Return the change of the pull of convection from the tare to the loaded reading [kg]; a warm load reads light.

    Only the outermost body feels it: the container where there is one, else the load.
    """
    return load_convection_factor * (load_convection - tare_load_convection)


def _container(given: Mapping[str, Any]) -> bool:
    return any(name.startswith("container.") for name in given)


def _no_container(given: Mapping[str, Any]) -> bool:
    return not _container(given)


def _shape(body: str) -> tuple[Quantity, ...]:
    name = {"load": "load", "container": "container"}[body]
    return (
        Quantity(
            f"{body}.warmer_by",
            "temperature difference",
            f"how much warmer the {name} is than the air",
            f"Temperature of the {name}'s surface less that of the air around it; negative where it is colder.",
            low=-250.0,
            high=1500.0,
        ),
        Quantity(
            f"{body}.height",
            "length",
            f"height of the {name}",
            f"Height of the {name}, standing upright on the pan.",
            low=1e-4,
            high=1.0,
            varies="never",
        ),
        Quantity(
            f"{body}.diameter",
            "length",
            f"diameter of the {name}",
            f"Diameter of the {name}, taken as an upright cylinder.",
            low=1e-4,
            high=1.0,
            varies="never",
        ),
    )


EFFECT = Effect(
    name="convection",
    title="convection",
    help="A load warmer than the air is lifted by the air that it heats, a colder one pressed down.",
    source="EURAMET cg-18 v4.0, appendix F, after Gläser, Metrologia 27 (1990) 183; Ostrach, NACA Report 1111 (1953)",
    load=load,
    treatment="let it come to the temperature of the balance",
    leaves="what the last tenths of a kelvin do",
    quantities=(
        *_shape("load"),
        *_shape("container"),
        Quantity(
            "load.convection",
            "mass",
            "pull of convection",
            "On the outermost body, at one reading.",
            internal=True,
        ),
        Quantity(
            "load.convection_factor",
            "number",
            "model factor of convection",
            "How far the true pull may lie from the model's, for other shapes than a compact weight's.",
            low=0.01,
            high=100.0,
            varies="never",
            default=Assumed(Estimate.between(0.5, 2.0, "log-uniform"), "a factor of 2 either way (judgement)"),
        ),
    ),
    ways=(
        # without a container the pan is empty at the tare reading
        Way("tare.load.convection", lambda: 0.0, "an empty pan", only_if=_no_container),
        Way(
            "load.convection",
            lambda container_height, container_diameter, container_warmer_by, air_temperature, air_pressure: (
                heat.convection_cylinder(
                    container_height, container_diameter, container_warmer_by, air_temperature, air_pressure
                )
            ),
            "the container as an upright cylinder",
            source="Ostrach, NACA Report 1111 (1953)",
            only_if=_container,
        ),
        Way(
            "load.convection",
            lambda container_outer_volume, container_warmer_by: heat.convection_compact(
                container_outer_volume, container_warmer_by
            ),
            "the container as a compact body of its outer volume",
            source="EURAMET cg-18 v4.0, appendix F",
            only_if=_container,
        ),
        Way(
            "load.convection",
            lambda load_height, load_diameter, load_warmer_by, air_temperature, air_pressure: heat.convection_cylinder(
                load_height, load_diameter, load_warmer_by, air_temperature, air_pressure
            ),
            "the load as an upright cylinder",
            source="Ostrach, NACA Report 1111 (1953)",
            only_if=_no_container,
        ),
        Way(
            "load.convection",
            lambda load_volume, load_warmer_by: heat.convection_compact(load_volume, load_warmer_by),
            "the load as a compact body of its volume",
            source="EURAMET cg-18 v4.0, appendix F",
            only_if=_no_container,
        ),
    ),
    test="Weigh it again after half an hour with the draught shield open in between; a drift that dies away is heat.",
    caution="Hot crucibles burn: use tongs, and let them cool in a desiccator whose lid is slid, not lifted.",
    checks=(
        Check(
            lambda container_warmer_by, tare_container_warmer_by: (
                (container_warmer_by == tare_container_warmer_by) & (container_warmer_by != 0)
            ),
            "The container was taken as equally warm at the tare reading, so its convection cancels. If it was not, "
            "give "
            '[tare.container] warmer_by = "0 K" or what it was.',
            source="nothing said of the tare means the same as at the loaded reading",
        ),
        Check(
            lambda load_warmer_by: np.abs(load_warmer_by) > 20,
            "The load is {load_warmer_by} from the air: the convection model was made for up to 20 K.",
            source="EURAMET cg-18 v4.0, appendix F: 1 to 20 K",
        ),
        Check(
            lambda container_warmer_by: np.abs(container_warmer_by) > 20,
            "The container is {container_warmer_by} from the air: the convection model was made for up to 20 K.",
            source="EURAMET cg-18 v4.0, appendix F: 1 to 20 K",
        ),
    ),
)
