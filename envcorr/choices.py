"""The choices that several effects share, with their words and what they mean."""

from __future__ import annotations

from envcorr.vocabulary import Choice

__all__ = ["CHOICES"]

CHOICES: tuple[Choice, ...] = (
    Choice(
        "air.formula",
        "air density formula",
        {
            "CIPM-2007": "with CoolProp's humid air outside its range",
            "OIML R 111-1": "the approximation (E.3-1)",
        },
        default="CIPM-2007",
        source="Picard et al., Metrologia 45 (2008) 149",
    ),
    Choice(
        "adjusted.when",
        "when the balance was adjusted",
        {
            "just before": "in the same air as the weighing, with the balance as it stands",
            "unknown": "in other air, within the assumed range about the present one",
        },
    ),
    Choice(
        "balance.repeatability_from",
        "where the repeatability was found",
        {
            "here": "in this room, so it already holds draught and vibration",
            "elsewhere": "from a certificate or a data sheet, so the room's disturbances come on top",
        },
        default="elsewhere",
        source="the cautious of the two",
    ),
    Choice(
        "balance.warmed_up",
        "whether the balance has been switched on for long enough",
        {"yes": "for hours, in its place", "no": "it was switched on or moved today"},
        notes={
            "no": "A balance that was just switched on or moved drifts for hours, and what it does then is not "
            "computed: leave it on overnight, then adjust it. Weigh one steady object every ten minutes to see it "
            "settle."
        },
    ),
    Choice(
        "cycle.long_on_pan",
        "whether the load stays on the pan for many minutes",
        {"yes": "the reading is watched or logged under load", "no": "it is read as soon as it is steady"},
        notes={
            "yes": "Under a load that stays on, a balance creeps, and its zero may come back changed; that is not "
            "computed. Leave a weight on the pan as long and as often, and read the zero after it."
        },
    ),
    Choice(
        "balance.corrects_buoyancy",
        "whether the balance or its software already corrects for the air",
        {"yes": "the reading is already a mass", "no": "the reading is a weighing in air"},
        default="no",
        source="a balance shows what it weighs in air, unless it was set otherwise (common practice, no source)",
        notes={
            "yes": "The reading was taken as already corrected for the air's buoyancy, so it is not corrected again. "
            "Which air and which density the balance used is not known here, and does not enter the uncertainty."
        },
    ),
    Choice(
        "load.density_kind",
        "kind of density",
        {
            "gas-displacement": "of what displaces air, closed pores included (gas pycnometer)",
            "envelope": "mass over the outer volume; needs load.open_cell_fraction",
            "solid": "of a compact solid",
            "liquid": "of a liquid",
        },
        default="gas-displacement",
        source="taken as the density of what displaces air",
        refused={
            "bulk": "A bulk density counts the air between the grains, which displaces nothing. "
            "Give the gas-displacement density of the powder (a gas pycnometer, or a handbook's solid density)."
        },
    ),
    Choice(
        "load.density_from",
        "how the density was found",
        {
            "corrected": "with the air's buoyancy allowed for",
            "uncorrected weighing": "mass read in air over volume, not corrected for buoyancy",
        },
        default="corrected",
        source="a density is taken as a true one",
    ),
    Choice(
        "load.insulating",
        "whether the load or its container can hold a static charge",
        {"yes": "plastic, glass, filter, film, dry powder", "no": "metal, or earthed"},
    ),
    Choice(
        "container.closed",
        "whether the container is closed",
        {
            "never": "open: only its walls and the sample displace air",
            "each time": "closed in the air around it at each reading: acts as an open one",
            "kept shut": "shut before the tare reading and not opened before the loaded one",
        },
        default="never",
        source="an open container",
    ),
    Choice(
        "target.measurand",
        "what the reading stands for",
        {
            "mass": "the true mass",
            "conventional mass": "the mass of a weight of 8000 kg/m³ that balances it in air of 1.2 kg/m³ (OIML D 28)",
            "difference": "the difference between two net weighings of one load",
        },
        default="mass",
        source="the true mass",
    ),
)
