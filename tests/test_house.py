"""How the package is laid out: imports, exports, names, and what it takes to add an effect."""

import ast
import importlib
import inspect
import re
import sys
from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path

import pytest

import envcorr
from envcorr.catalogue import CATALOGUE, Catalogue
from envcorr.choices import CHOICES
from envcorr.derived import QUANTITIES as DERIVED
from envcorr.derived import WAYS
from envcorr.effect import Effect, Way, parameters
from envcorr.effects import EFFECTS
from envcorr.errors import CatalogueError
from envcorr.model import make_plan
from envcorr.vocabulary import QUANTITIES, TARGET, Quantity
from tests.scene import ROOM, UG, about, setup

PACKAGE = Path(envcorr.__file__).parent
DEVELOPERS = PACKAGE.parent / "DEVELOPERS.md"


def module_name(path: Path) -> str:
    return ".".join(path.relative_to(PACKAGE.parent).with_suffix("").parts).removesuffix(".__init__")


TREES = {module_name(path): ast.parse(path.read_text("utf-8")) for path in sorted(PACKAGE.rglob("*.py"))}
each_module = pytest.mark.parametrize("module", TREES)


def imports(tree: ast.Module, *, top_level: bool = False) -> Iterator[tuple[str, str]]:
    """Yield module and name (empty for the module itself) of every import, those inside functions included."""
    for node in tree.body if top_level else ast.walk(tree):
        if isinstance(node, ast.Import):
            yield from ((alias.name, "") for alias in node.names)
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, "imports are absolute"
            yield from ((node.module or "", alias.name) for alias in node.names)


def own_imports(module: str) -> Iterator[tuple[str, str]]:
    """Yield module and name of what a module takes from the package; a module taken whole has no name."""
    for source, name in imports(TREES[module]):
        if source.partition(".")[0] == "envcorr":
            yield (f"{source}.{name}", "") if f"{source}.{name}" in TREES else (source, name)


# Layers --------------------------------------------------------------------------------------------------------------


def layers() -> list[str]:
    """Return the modules and folders in the order of the table in DEVELOPERS.md, the lowest first."""
    text = DEVELOPERS.read_text("utf-8").partition("| module |")[2]
    rows = [line.split("|")[1] for line in text.splitlines() if line.startswith("| `")]
    return [name.strip("/") for row in rows for name in re.findall(r"`([^`]+)`", row)]


def layer(module: str) -> str:
    """Return the module or folder right below the package."""
    return module.removeprefix("envcorr").strip(".").partition(".")[0]


@each_module
def test_imports_only_go_downward(module):
    order = ["", *layers(), "__main__"]  # the package itself holds only its version
    here = order.index(layer(module))
    for source, _ in own_imports(module):
        there = order.index(layer(source))
        assert there < here or layer(source) == layer(module), f"{module} imports {source}, which stands above it"


@each_module
def test_no_two_modules_of_a_folder_import_each_other(module):
    seen, pending = set(), [module]
    while pending:
        for source, _ in own_imports(pending.pop()):
            assert source != module, f"{module} imports itself by way of {sorted(seen)}"
            if source not in seen:
                seen.add(source)
                pending.append(source)


@each_module
def test_an_effect_knows_no_other_and_a_format_no_job(module):
    sources = {source for source, _ in own_imports(module)}
    if layer(module) == "effects" and module != "envcorr.effects":
        assert not any(layer(source) == "effects" for source in sources)
    if layer(module) == "render" and "json" not in module:  # JSON is the result itself, without blocks between
        assert not any(layer(source) == "jobs" for source in sources)


@each_module
def test_heavy_imports_wait_until_they_are_used(module):
    """At module level stand the standard library, numpy and click only; what a server loads is another matter."""
    if module == "envcorr.page.server":
        return
    roots = {source.partition(".")[0] for source, _ in imports(TREES[module], top_level=True)}
    assert roots - sys.stdlib_module_names <= {"envcorr", "numpy", "click"}


# Exports -------------------------------------------------------------------------------------------------------------


def exported(module: str) -> list[str]:
    for node in TREES[module].body:
        if isinstance(node, ast.Assign) and ast.unparse(node.targets[0]) == "__all__":
            return list(ast.literal_eval(node.value))
    return []


def defined(module: str) -> set[str]:
    """Return the public functions and classes that the module defines; a command belongs to its group."""
    found = [node for node in TREES[module].body if isinstance(node, ast.FunctionDef | ast.ClassDef)]
    commands = [node for node in found if any(".command(" in ast.unparse(d) for d in node.decorator_list)]
    return {node.name for node in found if node not in commands and not node.name.startswith("_")}


@each_module
def test_exports(module):
    """__all__ names every public function and class, and everything that another module takes."""
    names = exported(module)
    taken = {name for other in TREES for source, name in own_imports(other) if source == module and name}
    assert len(names) == len(set(names))
    assert not {name for name in taken if name.startswith("_") and name != "__version__"}
    assert {*defined(module), *taken} - {*names, "__version__"} == set(), "missing from __all__"
    loaded = vars(importlib.import_module(module)) if module != "envcorr.__main__" else {}
    assert set(names) <= set(loaded)


@each_module
def test_what_is_public_is_explained(module):
    """Every module, public function, class, method and property has a docstring."""
    tree = TREES[module]
    assert ast.get_docstring(tree), "the module has none"
    for node in ast.walk(tree):
        if isinstance(node, ast.ClassDef) and not node.name.startswith("_"):
            public = [node, *(child for child in node.body if isinstance(child, ast.FunctionDef))]
            for found in public:
                assert found.name.startswith("_") or ast.get_docstring(found), found.name
    for name in defined(module):
        assert any(getattr(node, "name", "") == name and ast.get_docstring(node) for node in tree.body), name


# The catalogue -------------------------------------------------------------------------------------------------------


def test_the_effects_are_the_files_of_their_folder():
    files = {path.stem for path in (PACKAGE / "effects").glob("*.py")} - {"__init__"}
    assert {effect.name for effect in EFFECTS} == files
    for effect in EFFECTS:
        assert importlib.import_module(f"envcorr.effects.{effect.name}").EFFECT is effect


@pytest.mark.parametrize("effect", EFFECTS, ids=lambda effect: effect.name)
def test_an_effect_says_what_it_must(effect):
    for text in (effect.title, effect.help, effect.source, effect.test):
        assert text.strip()
    assert bool(effect.treatment) == bool(effect.leaves), "a treatment says what it leaves"
    for check in effect.checks:
        assert check.source, check.sentence
        assert check.level in ("warning", "info", "caution")


def functions() -> Iterator[object]:
    every = [*WAYS, *(way for effect in EFFECTS for way in effect.ways)]
    for way in every:
        yield way.function
        yield from (check.function for check in way.checks)
    for effect in EFFECTS:
        yield from filter(None, (effect.load, effect.gain, effect.dof))
        yield from (record.function for record in (*effect.checks, *effect.answers))


def test_every_parameter_is_a_quantity():
    names = {name for function in functions() for name in parameters(function)}
    known = {name.replace(".", "_") for name in CATALOGUE.quantities}
    for name in names:
        assert name in known or name.partition("_")[2] in known, name
    assert {"air_density", "tare_air_density", "adjusted_air_density"} <= names


@pytest.mark.parametrize("quantity", CATALOGUE.quantities.values(), ids=lambda quantity: quantity.name)
def test_a_quantity_says_what_it_must(quantity):
    assert re.fullmatch(r"[a-z]+(\.[a-z0-9_]+)?", quantity.name)
    assert quantity.label
    assert quantity.help.endswith(".")
    assert quantity.low < quantity.high
    assert quantity.default is None or quantity.default.source
    if quantity.usual != (-float("inf"), float("inf")):
        assert quantity.low <= quantity.usual[0] < quantity.usual[1] <= quantity.high


def test_checks_name_only_their_own_quantities():
    """A sentence with a name in braces that its function does not take could not be printed."""
    every = [check for way in WAYS for check in way.checks]
    every += [check for effect in EFFECTS for check in effect.checks]
    every += [check for effect in EFFECTS for way in effect.ways for check in way.checks]
    assert every
    for check in every:
        named = set(re.findall(r"\{(\w+)\}", check.sentence))
        assert named <= set(parameters(check.function)), check.sentence


# A throw-away effect -------------------------------------------------------------------------------------------------


def magnet(bench_magnet_pull, load_mass):
    """Return the pull of a magnet [kg], however heavy the load."""
    return bench_magnet_pull + 0 * load_mass


PULL = Quantity("bench.magnet_pull", "mass", "pull of the magnet", "With the load lifted off.", limit=True)
MAGNET = Effect("magnet", "magnet", "A magnet pulls at the pan.", "invented", load=magnet, quantities=(PULL,))


def build(*effects: Effect) -> Catalogue:
    return Catalogue.build([*QUANTITIES, *TARGET, *DERIVED], CHOICES, WAYS, [*EFFECTS, *effects])


def test_one_more_effect_is_one_record():
    catalogue = build(MAGNET)
    lacking = make_plan(setup(ROOM), catalogue=catalogue)
    assert [missing.lacks for missing in lacking.not_assessed if missing.effect is MAGNET] == [("bench.magnet_pull",)]
    given = setup(ROOM)
    given = replace(given, estimates={**given.estimates, "bench.magnet_pull": about(0.0, 20 * UG)})
    plan = make_plan(given, catalogue=catalogue)
    planned = next(found for found in plan.effects if found.effect is MAGNET)
    assert "bench.magnet_pull" in [leaf.name for leaf in plan.leaves]
    assert "bench.magnet_pull" not in plan.unused
    pulled = {"bench.magnet_pull": 20 * UG}
    values = plan.evaluate([pulled.get(leaf.name, leaf.estimate.centre) for leaf in plan.leaves])
    assert plan.parts(values).effect(plan.effects.index(planned)) == 20 * UG


def test_the_room_does_not_know_the_effect_that_is_not_in_the_catalogue():
    given = setup(ROOM)
    given = replace(given, estimates={**given.estimates, "bench.magnet_pull": about(0.0, 20 * UG)})
    assert make_plan(given).unused == ("bench.magnet_pull",)


def test_a_misspelt_parameter_is_refused_with_the_nearest_name():
    def pull(air_preasure):
        return air_preasure

    with pytest.raises(CatalogueError, match=r"parameter air_preasure \(nearest: air_pressure\)"):
        build(replace(MAGNET, load=pull))


def test_a_misspelt_parameter_of_a_way_is_refused():
    way = Way("air.pressure", lambda air_altitud: air_altitud, "from the altitude alone")
    with pytest.raises(CatalogueError, match=r"air_altitud \(nearest: air_altitude\)"):
        build(replace(MAGNET, ways=(way,)))


@pytest.mark.parametrize(
    ("change", "message"),
    [
        pytest.param({"load": None}, "acts on nothing", id="nothing"),
        pytest.param({"name": "buoyancy"}, "share a name", id="name taken"),
        pytest.param({"needed": "load.insulated"}, "unknown choice load.insulated", id="needed"),
        pytest.param({"when": {"container.closed": ("ajar",)}}, "unknown choice", id="when"),
        pytest.param({"quantities": (PULL, QUANTITIES[0])}, "two quantities share", id="quantity taken"),
        pytest.param({"quantities": (replace(PULL, internal=True),)}, "nothing can supply", id="no supply"),
        pytest.param(
            {"ways": (Way("bench.magnet_pul", lambda: 0.0, "none"),)}, "nearest: bench.magnet_pull", id="way's target"
        ),
        pytest.param(
            {"ways": (Way("bench.magnet_pull", lambda: 0.0, "none", at_best=("load_mass",)),)},
            "has no parameter",
            id="at best",
        ),
    ],
)
def test_a_record_that_does_not_fit_is_refused(change, message):
    with pytest.raises(CatalogueError, match=message):
        build(replace(MAGNET, **change))


def test_parameters_are_read_from_the_signature():
    assert parameters(magnet) == tuple(inspect.signature(magnet).parameters) == ("bench_magnet_pull", "load_mass")
