"""`corymb rerun`: repeats what a recipe says."""

from __future__ import annotations

import hashlib
from argparse import ArgumentParser, Namespace
from collections.abc import Callable, Mapping
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING

from analysis.errors import InputError
from app.commands.arguments import add_compute, add_out, add_quiet
from app.terminal import Terminal

if TYPE_CHECKING:
    from analysis.handover import EnrichRecipe, Recipe, Source
    from analysis.network import Network

NAME = "rerun"
HELP = "repeat what a recipe says; gives the same tables, or says what differs"
LARGEST_RECIPE = 4_000_000


def add_arguments(parser: ArgumentParser) -> None:
    """Add the arguments of `corymb rerun`."""
    parser.add_argument("recipe", metavar="RECIPE", type=Path, help="recipe.toml of an earlier output")
    add_out(parser)
    parser.add_argument(
        "--anyway",
        action="store_true",
        help="go on where a file or a library is not what it was; the tables may differ",
    )
    add_compute(parser)
    add_quiet(parser)


def run(arguments: Namespace, terminal: Terminal) -> int:
    """Find the recipe's network, check that it is the same, and do the work again."""
    from analysis.handover import check_folder, read_enrich_recipe, read_recipe
    from analysis.handover.comparison_files import is_comparison
    from analysis.study import StudySettings
    from app.gene_set_files import MeaningFiles
    from app.pipeline import read_input, study_into, sweep_into

    text = recipe_text(arguments.recipe)
    told: Callable[[InputError], None] = partial(_differs, anyway=arguments.anyway, terminal=terminal)
    if is_comparison(text, str(arguments.recipe)):
        return _compare_again(text, arguments, terminal, told)
    enrichment = read_enrich_recipe(text, str(arguments.recipe))
    if enrichment is not None:
        return _enrich_again(enrichment, arguments, terminal, told)
    recipe = read_recipe(text, str(arguments.recipe))
    check_folder(arguments.out)
    check_versions(recipe.versions, arguments.recipe, told)
    path = find_source(recipe, arguments.recipe, told)
    given = read_input(path, recipe.weight, recipe.min_weight, strict=False, label=recipe.label)
    check_network(given.network, recipe, arguments.recipe, told)
    progress = terminal.progress(quiet=arguments.quiet)
    if isinstance(recipe.settings, StudySettings):
        find = partial(find_file, path=arguments.recipe, told=told)
        gene_sets = None if recipe.meaning is None else MeaningFiles.of_request(recipe.meaning, find)
        study_into(
            given,
            recipe.settings,
            arguments.out,
            arguments.compute,
            progress,
            parts=recipe.parts,
            gene_sets=gene_sets,
        )
    else:
        sweep_into(given, recipe.settings, arguments.out, arguments.compute, progress)
    if not arguments.quiet:
        terminal.say(f"Written to {arguments.out}.")
    return 0


def _compare_again(text: str, arguments: Namespace, terminal: Terminal, told: Callable[[InputError], None]) -> int:
    """Find both folders, check that they are the same, and compare them again."""
    from analysis.handover import check_folder
    from analysis.handover.comparison_files import read_comparison_recipe
    from app.comparing import compare_into, read_folder

    path: Path = arguments.recipe
    recipe = read_comparison_recipe(text, str(path))
    check_folder(arguments.out)
    check_versions(recipe.versions, path, told)
    outputs = []
    for asked in (recipe.first, recipe.second):
        output = read_folder(path.resolve().parent / asked.path, asked.label)
        if output.sha256 != asked.sha256:
            remedy = "bring back its membership.csv and network.graphml as they were"
            told(InputError(str(output.folder), "the clustering has changed since the recipe was written", remedy))
        outputs.append(output)
    compare_into(outputs[0], outputs[1], recipe.settings, arguments.out, terminal.progress(quiet=arguments.quiet))
    if not arguments.quiet:
        terminal.say(f"Written to {arguments.out}.")
    return 0


def _enrich_again(
    recipe: EnrichRecipe, arguments: Namespace, terminal: Terminal, told: Callable[[InputError], None]
) -> int:
    """Find the table of modules and the gene sets, check that they are the same, and test again."""
    from analysis.handover import check_folder
    from app.gene_set_files import MeaningFiles
    from app.pipeline import enrich_into

    check_folder(arguments.out)
    check_versions(recipe.versions, arguments.recipe, told)
    find = partial(find_file, path=arguments.recipe, told=told)
    files = MeaningFiles.of_request(recipe.meaning, find)
    enrich_into(find(recipe.membership), files, arguments.out, terminal.progress(quiet=arguments.quiet))
    if not arguments.quiet:
        terminal.say(f"Written to {arguments.out}.")
    return 0


def recipe_text(path: Path) -> str:
    """Read the text of a recipe."""
    from analysis.intake.opener import read_bytes

    try:
        return read_bytes(path, LARGEST_RECIPE).decode("utf-8-sig")
    except UnicodeDecodeError:
        raise InputError(
            str(path), "this is not a recipe (no UTF-8 text)", "name the recipe.toml of an earlier run"
        ) from None


def _differs(difference: InputError, *, anyway: bool, terminal: Terminal) -> None:
    """Stop at a difference, or tell it and go on where that was asked for."""
    if not anyway:
        raise InputError(difference.where, difference.found, f"{difference.remedy}, or go on with --anyway")
    terminal.note(f"{difference.where}: {difference.found}; going on, so the tables may differ")


def check_network(network: Network, recipe: Recipe, path: Path, told: Callable[[InputError], None]) -> None:
    """Tell where the network is not the one that the recipe was written for."""
    if network.fingerprint != recipe.fingerprint:
        told(
            InputError(
                str(path),
                "the file gives another network than when the recipe was written (its fingerprint differs)",
                "take back changes of weight or min_weight in it, or run corymb modules anew",
            )
        )


def find_source(recipe: Recipe, path: Path, told: Callable[[InputError], None]) -> Path:
    """Return the recipe's network; see `find_file`."""
    return find_file(recipe.source, path, told, "the network's file")


def find_file(source: Source, path: Path, told: Callable[[InputError], None], what: str = "the file") -> Path:
    """Return a file of the recipe: where it was as seen from the recipe, or beside the recipe.

    A file that is not what it was is told of, and taken where that does not stop the work.

    Raises
    ------
    InputError
        Where there is no such file, or none with the same content.
    """
    from analysis.intake.opener import read_bytes

    folder = path.resolve().parent
    places = [folder / source.path, folder / source.name]
    there = [place for place in dict.fromkeys(places) if place.is_file()]
    for place in there:
        if hashlib.sha256(read_bytes(place)).hexdigest() == source.sha256:
            return place
    if there:
        told(
            InputError(
                str(there[0]),
                "the file has changed since the recipe was written (its SHA-256 differs)",
                f"put the file as it was beside {path.name}",
            )
        )
        return there[0]
    raise InputError(
        str(path),
        f"{what} {source.path!r} is not there",
        f"put {source.name!r} beside {path.name}",
    )


def check_versions(written: Mapping[str, str], path: Path, told: Callable[[InputError], None]) -> None:
    """Tell which libraries have another version than when the recipe was written."""
    from analysis.version import versions

    here = versions()
    different = [
        f"{name} {there} (here {here.get(name, 'not known')})"
        for name, there in written.items()
        if here.get(name) != there
    ]
    if different:
        told(InputError(str(path), f"the recipe was written with {', '.join(different)}", "install these versions"))
