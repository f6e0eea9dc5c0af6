"""`recipe.toml`: all that is needed to repeat a study or a sweep, readable and editable."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import asdict, dataclass
from typing import Any

from analysis.errors import InputError, SettingError
from analysis.handover.bundle import Bundle, Source, SweepBundle
from analysis.handover.meaning_recipe import MEANING, MeaningRequest, meaning_table, read_meaning
from analysis.handover.recipe_parts import Kinds, kinds_of, parse_toml, refuse_unknown, table_of, texts_of, values_of
from analysis.intake.reading import label_of
from analysis.network import Network
from analysis.study import SUGGEST, StudySettings
from analysis.trust.sweep import SweepSettings
from analysis.version import VERSION, versions

MODULES, SWEEP = "modules", "sweep"

_NETWORK = ("file", "sha256", "fingerprint")
_LABEL = "label"
_HANDOVER = "handover"
_TAKEN: Kinds = {"weight": (str,), "min_weight": (float, int)}
"""How the network was taken from its file; not a setting of the sweep itself."""


@dataclass(frozen=True)
class Recipe:
    """What a recipe says.

    Attributes
    ----------
    source : Source
        The network's file; its path starts from the recipe's folder.
    fingerprint : str
        Of the network that was worked on.
    settings : StudySettings or SweepSettings
        The one for `corymb modules`, the other for `corymb sweep`.
    weight : str or None
        Column of the weights, `none` to leave them out, None to find it.
    min_weight : float or None
        Edges below are left out.
    versions : mapping of str to str
        Of corymb, Python and the libraries that made the tables.
    label : str
        What the network was called, where that is not the name of its file; else empty.
    parts : tuple of str
        What was written beside the files that always are.
    meaning : MeaningRequest or None
        The gene sets, where there were any.
    """

    source: Source
    fingerprint: str
    settings: StudySettings | SweepSettings
    weight: str | None
    min_weight: float | None
    versions: Mapping[str, str]
    label: str = ""
    parts: tuple[str, ...] = ()
    meaning: MeaningRequest | None = None


def recipe_file(bundle: Bundle) -> dict[str, bytes]:
    """Return `recipe.toml` of a study; nothing where the network did not come from a file: nothing can be repeated."""
    settings = bundle.study.settings.as_dict()
    if bundle.study.suggestion:
        settings["resolution"] = SUGGEST  # the study holds what was suggested; to repeat it, it must be asked for again
    names = {module: name for module, name in settings.pop("names").items() if name}
    more: dict[str, Any] = {_HANDOVER: {"also": list(bundle.parts)}} if bundle.parts else {}
    if bundle.meaning_request is not None:
        more[MEANING] = meaning_table(bundle.meaning_request)
    return _render(MODULES, bundle.source, bundle.study.network, settings, more | ({"names": names} if names else {}))


def sweep_recipe_file(bundle: SweepBundle) -> dict[str, bytes]:
    """Return `recipe.toml` of a sweep; nothing where the network did not come from a file."""
    settings = asdict(bundle.sweep.settings) | {"weight": bundle.weight, "min_weight": bundle.min_weight}
    return _render(SWEEP, bundle.source, bundle.network, settings, {})


def _render(
    work: str, source: Source | None, network: Network, settings: Mapping[str, Any], more: Mapping[str, Any]
) -> dict[str, bytes]:
    import tomli_w

    if source is None:
        return {}
    content = {
        "work": work,
        "network": {
            "file": source.path,
            "sha256": source.sha256,
            "fingerprint": network.fingerprint,
            **_label(network),
        },
        "settings": {key: value for key, value in settings.items() if value is not None},
        **more,
        "versions": versions(),
    }
    return {"recipe.toml": tomli_w.dumps(content).encode()}


def _label(network: Network) -> dict[str, str]:
    """Return what the network is called, where its file does not say so."""
    return {} if network.label == label_of(network.provenance.get("file", "")) else {_LABEL: network.label}


def read_recipe(text: str, where: str = "recipe.toml") -> Recipe:
    """Return what a recipe says.

    Parameters
    ----------
    text : str
        Its content.
    where : str
        Its file name, for messages.

    Raises
    ------
    InputError
        Where it is no TOML, a part is missing or unknown, or a value is not of its kind.
    """
    content = parse_toml(text, where)
    written = texts_of(content, "versions", where)
    writer = written.get("corymb", "")
    refuse_unknown(
        where, "the recipe", content, ("work", "network", _HANDOVER, MEANING, "settings", "names", "versions"), writer
    )
    network = texts_of(content, "network", where)
    refuse_unknown(where, "[network]", network, (*_NETWORK, _LABEL), writer)
    if missing := [key for key in _NETWORK if key not in network]:
        raise InputError(where, f"[network] lacks {missing[0]!r}", "use the recipe as it was written")
    path = network["file"]
    source = Source(path.replace("\\", "/").rsplit("/", 1)[-1], network["sha256"], path)
    work = content.get("work")
    if work not in (MODULES, SWEEP):
        raise InputError(where, f"work is {work!r}", f"corymb {VERSION} repeats {MODULES!r} and {SWEEP!r}")
    try:
        settings, taken = (_study if work == MODULES else _sweep)(content, where, writer)
    except SettingError as error:
        raise InputError(where, str(error), "mend it in the recipe") from None
    return Recipe(
        source,
        network["fingerprint"],
        settings,
        taken.get("weight"),
        taken.get("min_weight"),
        written,
        network.get(_LABEL, ""),
        _parts(content, where, writer),
        read_meaning(content, where, writer),
    )


def _parts(content: Mapping[str, Any], where: str, writer: str) -> tuple[str, ...]:
    """Return what is to be written beside the files that always are; which parts there are is checked on writing."""
    if _HANDOVER not in content:
        return ()
    table = table_of(content, _HANDOVER, where)
    refuse_unknown(where, f"[{_HANDOVER}]", table, ("also",), writer)
    parts = table.get("also", [])
    if not isinstance(parts, list) or not all(isinstance(part, str) for part in parts):
        raise InputError(where, f"also in [{_HANDOVER}] is {parts!r}", "give a list of texts")
    return tuple(dict.fromkeys(parts))


def _study(content: Mapping[str, Any], where: str, writer: str) -> tuple[StudySettings, dict[str, Any]]:
    kinds, optional = kinds_of(StudySettings, leave_out=("names",))
    values = values_of(content, where, kinds, optional, writer)
    resolution = values.get("resolution")
    if isinstance(resolution, str) and resolution != SUGGEST:
        raise InputError(where, f"resolution is {resolution!r}", f'give a number, or "{SUGGEST}"')
    names = texts_of(content, "names", where) if "names" in content else {}
    return StudySettings(**values, names=names), values


def _sweep(content: Mapping[str, Any], where: str, writer: str) -> tuple[SweepSettings, dict[str, Any]]:
    if "names" in content:
        refuse_unknown(where, "the recipe of a sweep", table_of(content, "names", where), (), writer)
    kinds, optional = kinds_of(SweepSettings)
    values = values_of(content, where, {**kinds, **_TAKEN}, (*optional, *_TAKEN), writer)
    taken = {key: values.pop(key) for key in _TAKEN if key in values}
    return SweepSettings(**values), taken
