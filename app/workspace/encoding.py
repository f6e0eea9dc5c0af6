"""Results as plain values and arrays, and back again without losing a bit.

The known types are in `KEPT`; a new result type joins by standing there. Tables become arrays where their columns are
numbers, and lists where they are text.
"""

from __future__ import annotations

import json
from collections.abc import Callable, Mapping, Sequence
from dataclasses import fields, replace
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from analysis.modules import Modules
from analysis.network import Network, locked
from analysis.portrait import PORTRAIT_TYPES
from analysis.study import NullDraws, Study, StudySettings
from app.workspace.entries import to_json

if TYPE_CHECKING:
    import pandas as pd

Arrays = dict[str, NDArray[Any]]
Find = Callable[[str], Network]

KEPT: dict[str, type[Any]] = {
    kind.__name__: kind for kind in (Study, StudySettings, Modules, NullDraws, *PORTRAIT_TYPES)
}
DOCUMENT = "document"
TEXT_DTYPES = frozenset({"object", "str", "string"})


def network_to_arrays(network: Network) -> Arrays:
    """Return what makes a network, apart from its label and provenance."""
    arrays: Arrays = {
        "names": _text_array(json.dumps(network.names)),
        "sources": network.sources,
        "targets": network.targets,
    }
    if network.weights is not None:
        arrays["weights"] = network.weights
    return arrays


def network_from_arrays(arrays: Mapping[str, NDArray[Any]], label: str, provenance: Mapping[str, str]) -> Network:
    """Return the network again."""
    weights = arrays.get("weights")
    return Network(
        tuple(json.loads(arrays["names"].tobytes())),
        locked(arrays["sources"]),
        locked(arrays["targets"]),
        None if weights is None else locked(weights),
        label,
        dict(provenance),
    )


def study_to_arrays(study: Study) -> Arrays:
    """Return everything in a study but its network, of which the fingerprint, label and provenance stand."""
    arrays: Arrays = {}
    tree = _encode(study, "study", arrays)
    arrays[DOCUMENT] = _text_array(to_json(tree))
    return arrays


def study_from_arrays(arrays: Mapping[str, NDArray[Any]], find: Find) -> Study:
    """Return the study again; `find` returns a network by its fingerprint.

    Raises
    ------
    TypeError
        Where another version of corymb wrote it, with other fields.
    """
    study = _decode(json.loads(arrays[DOCUMENT].tobytes()), arrays, find)
    if not isinstance(study, Study):
        raise TypeError(f"a {type(study).__name__} stands where a study was expected")
    return study


def result_to_arrays(value: Any) -> Arrays:
    """Return any result of the known types as arrays."""
    arrays: Arrays = {}
    tree = _encode(value, "result", arrays)
    arrays[DOCUMENT] = _text_array(to_json(tree))
    return arrays


def result_from_arrays(arrays: Mapping[str, NDArray[Any]]) -> Any:
    """Return the result of `result_to_arrays` again; it must hold no network.

    Raises
    ------
    KeyError, TypeError
        Where another version of corymb wrote it.
    """

    def find(fingerprint: str) -> Network:
        raise KeyError(fingerprint)

    return _decode(json.loads(arrays[DOCUMENT].tobytes()), arrays, find)


def _text_array(text: str) -> NDArray[np.uint8]:
    return np.frombuffer(text.encode("ascii"), np.uint8)


def _encode(value: Any, place: str, arrays: Arrays) -> Any:
    import pandas as pd

    if value is None or isinstance(value, (bool, int, float, str, np.generic)):
        return value
    if isinstance(value, np.ndarray):
        arrays[place] = value
        return {"array": place}
    if isinstance(value, Network):
        return {"network": [value.fingerprint, value.label, dict(value.provenance)]}
    if isinstance(value, pd.DataFrame):
        return {"table": _encode_table(value, place, arrays)}
    return _encode_many(value, place, arrays)


def _encode_many(value: Any, place: str, arrays: Arrays) -> dict[str, Any]:
    name = type(value).__name__
    if KEPT.get(name) is type(value):
        inner = {
            part.name: _encode(getattr(value, part.name), f"{place}.{part.name}", arrays) for part in fields(value)
        }
        return {"kept": name, "fields": inner}
    if isinstance(value, Mapping):
        return {"mapping": [[key, _encode(inner, f"{place}.{key}", arrays)] for key, inner in value.items()]}
    if isinstance(value, tuple) and value and all(_is_plain_row(inner) for inner in value):
        # Thousands of small arrays as two long ones.
        arrays[place] = np.concatenate(value)
        arrays[f"{place}.ends"] = np.cumsum([len(inner) for inner in value])
        return {"rows": place}
    if isinstance(value, (tuple, list)):
        inner_values = [_encode(inner, f"{place}.{position}", arrays) for position, inner in enumerate(value)]
        return {"tuple" if isinstance(value, tuple) else "list": inner_values}
    raise TypeError(f"{place}: a {name} cannot be kept; add its type to KEPT")


def _is_plain_row(value: Any) -> bool:
    return isinstance(value, np.ndarray) and value.ndim == 1 and value.dtype == np.int32


def _decode(tree: Any, arrays: Mapping[str, NDArray[Any]], find: Find) -> Any:
    if not isinstance(tree, dict):
        return tree
    if "kept" in tree:
        values = {name: _decode(inner, arrays, find) for name, inner in tree["fields"].items()}
        return KEPT[tree["kept"]](**values)
    ((form, content),) = tree.items()
    return _FORMS[form](content, arrays, find)


def _decode_network(content: Any, _arrays: Mapping[str, NDArray[Any]], find: Find) -> Network:
    fingerprint, label, provenance = content
    network = find(fingerprint)
    if (network.label, dict(network.provenance)) == (label, provenance):
        return network
    return replace(network, label=label, provenance=provenance)


def _decode_rows(place: str, arrays: Mapping[str, NDArray[Any]], _find: Find) -> tuple[NDArray[Any], ...]:
    return tuple(locked(row) for row in np.split(arrays[place], arrays[f"{place}.ends"][:-1]))


_FORMS: dict[str, Callable[[Any, Mapping[str, NDArray[Any]], Find], Any]] = {
    "array": lambda content, arrays, _: arrays[content],
    "network": _decode_network,
    "table": lambda content, arrays, _: _decode_table(content, arrays),
    "mapping": lambda content, arrays, find: {key: _decode(inner, arrays, find) for key, inner in content},
    "rows": _decode_rows,
    "tuple": lambda content, arrays, find: tuple(_decode(inner, arrays, find) for inner in content),
    "list": lambda content, arrays, find: [_decode(inner, arrays, find) for inner in content],
}


def _encode_table(table: pd.DataFrame, place: str, arrays: Arrays) -> list[list[Any]]:
    """Return `[name, dtype, values]` for each column, or `[name, dtype, None]` where the values are an array."""
    if not np.array_equal(table.index, np.arange(len(table))):
        raise TypeError(f"{place}: only tables with rows numbered from 0 can be kept")
    columns: list[list[Any]] = []
    for name in table.columns:
        column = table[name]
        dtype = str(column.dtype)
        if dtype in TEXT_DTYPES:
            columns.append([name, dtype, [_cell(cell) for cell in column.tolist()]])
        elif isinstance(column.dtype, np.dtype):
            arrays[f"{place}.{name}"] = column.to_numpy()
            columns.append([name, dtype, None])
        else:
            raise TypeError(f"{place}: column {name!r} of type {dtype} cannot be kept")
    return [[place], *columns]


def _cell(cell: Any) -> Any:
    """Let through what JSON gives back as it was."""
    if cell is None or isinstance(cell, (str, bool, int, float, np.generic)):
        return cell
    import pandas as pd

    if cell is pd.NA:
        return None
    raise TypeError(f"a table's cell of type {type(cell).__name__} cannot be kept")


def _decode_table(content: Sequence[Sequence[Any]], arrays: Mapping[str, NDArray[Any]]) -> pd.DataFrame:
    import pandas as pd

    (place,), *columns = content
    return pd.DataFrame(
        {
            name: pd.Series(arrays[f"{place}.{name}"].copy() if values is None else values, dtype=dtype)
            for name, dtype, values in columns
        }
    )
