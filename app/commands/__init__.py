"""The subcommands of `corymb`, one file each; heavy libraries load when a command runs, not when it is listed."""

from __future__ import annotations

from types import ModuleType

from app.commands import (
    compare_clusterings,
    enrich_modules,
    find_modules,
    inspect_network,
    open_dashboard,
    portrait_network,
    rerun_recipe,
    sweep_resolutions,
)

COMMANDS: dict[str, ModuleType] = {
    module.NAME: module
    for module in (
        open_dashboard,
        inspect_network,
        portrait_network,
        find_modules,
        sweep_resolutions,
        enrich_modules,
        compare_clusterings,
        rerun_recipe,
    )
}
"""Each has `NAME`, `HELP`, `add_arguments(parser)` and `run(arguments, terminal) -> int`."""
