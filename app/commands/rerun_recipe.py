"""`corymb rerun`: repeats what a recipe says."""

from __future__ import annotations

import hashlib
from argparse import ArgumentParser, Namespace
from pathlib import Path
from typing import TYPE_CHECKING

from analysis.errors import InputError
from app.commands.arguments import add_compute, add_out, add_quiet
from app.terminal import Terminal

if TYPE_CHECKING:
    from analysis.handover import Recipe

NAME = "rerun"
HELP = "repeat what a recipe says; gives the same tables"
LARGEST_RECIPE = 4_000_000


def add_arguments(parser: ArgumentParser) -> None:
    """Add the arguments of `corymb rerun`."""
    parser.add_argument("recipe", metavar="RECIPE", type=Path, help="recipe.toml of an earlier output")
    add_out(parser)
    add_compute(parser)
    add_quiet(parser)


def run(arguments: Namespace, terminal: Terminal) -> int:
    """Find the recipe's network, check that it is the same, and do the work again."""
    from analysis.handover import check_folder
    from analysis.study import StudySettings
    from app.pipeline import read_input, study_into, sweep_into

    recipe = open_recipe(arguments.recipe)
    check_folder(arguments.out)
    given = read_input(find_source(recipe, arguments.recipe), recipe.weight, recipe.min_weight)
    if given.network.fingerprint != recipe.fingerprint:
        raise InputError(
            str(arguments.recipe),
            "the same file gives another network than when the recipe was written",
            "--weight or --min-weight were changed in it, or another corymb wrote it; run corymb modules anew",
        )
    if not arguments.quiet:
        for difference in differing_versions(recipe):
            terminal.note(difference)
    progress = terminal.progress(quiet=arguments.quiet)
    if isinstance(recipe.settings, StudySettings):
        study_into(given, recipe.settings, arguments.out, arguments.compute, progress)
    else:
        sweep_into(given, recipe.settings, arguments.out, arguments.compute, progress)
    if not arguments.quiet:
        terminal.say(f"Written to {arguments.out}.")
    return 0


def open_recipe(path: Path) -> Recipe:
    """Read a recipe from its file."""
    from analysis.handover import read_recipe
    from analysis.intake.opener import read_bytes

    try:
        text = read_bytes(path, LARGEST_RECIPE).decode("utf-8-sig")
    except UnicodeDecodeError:
        raise InputError(
            str(path), "this is not a recipe (no UTF-8 text)", "name the recipe.toml of an earlier run"
        ) from None
    return read_recipe(text, str(path))


def find_source(recipe: Recipe, path: Path) -> Path:
    """Return the recipe's network, unchanged: where it was as seen from the recipe, or beside the recipe.

    Raises
    ------
    InputError
        Where there is no such file, or none with the same content.
    """
    from analysis.intake.opener import read_bytes

    folder = path.resolve().parent
    places = [folder / recipe.source.path, folder / recipe.source.name]
    there = [place for place in dict.fromkeys(places) if place.is_file()]
    for place in there:
        if hashlib.sha256(read_bytes(place)).hexdigest() == recipe.source.sha256:
            return place
    if there:
        raise InputError(
            str(there[0]),
            "the file has changed since the recipe was written (its SHA-256 differs)",
            f"put the file as it was beside {path.name}, or run corymb modules on this one",
        )
    raise InputError(
        str(path),
        f"the network's file {recipe.source.path!r} is not there",
        f"put {recipe.source.name!r} beside {path.name}",
    )


def differing_versions(recipe: Recipe) -> list[str]:
    """Return a sentence on the libraries that have another version than when the recipe was written."""
    from analysis.version import versions

    here = versions()
    different = [
        f"{name} {there} (here {here.get(name, 'not known')})"
        for name, there in recipe.versions.items()
        if here.get(name) != there
    ]
    if not different:
        return []
    return [f"The recipe was written with {', '.join(different)}: tables may differ."]
