"""Words of the invented saltmarsh moss: gene symbols, older names, process terms.

All of them are made up. Stems that spreadsheets take for months, that belong to well-known genes of real organisms or
that are words best avoided are left out, as far as the author of this list knew them.
"""

from __future__ import annotations

from itertools import product

import numpy as np

SPECIES = "Salebryum fictum"

ONSETS = "bdfghklmnprstvz"
VOWELS = "aeiouy"
CODAS = "fjqvxz"
MONTHS = "dez fev haz lav maj nov tev"
KNOWN_GENES = (
    "baf bax bif bix box boz daf dax daz def dex dif div dix dof dox duf dux dyf faf faj fax fex fox fuz gaf gax gef "
    "gif giv gox haf hev hex hif hiv hix hof hox hyx jaz kaz kef kex kif kix kuz laf lef lev lex lif liv lix lov lox "
    "lux lyz maf mav max mef mex mez mif mix miz mof mov mox moz muf mux myf naf nav nax nef nej nex nif nix nox nuf "
    "paf pav pax paz pef pex pez pif pix puf pux raf rav rax ref rev rex rif rix riz rox ruv rux saf sax sef sev sez "
    "six siz sov sox suf suv suz syf syx taf tax taz tef tex tez tif tof tox tuj tyf vav vax vef vex vez vif vix vox "
    "zaf zax zif zyx"
)
WORDS = "biz faq fez fix fuq goj kez luz sex tux"

MEMBERS_PER_STEM = 12

PROCESSES = (
    ("brine export", "brine"),
    ("bilayer repair", "bilayer"),
    ("rhizoid anchoring", "rhizoid"),
    ("tide clock", "tide-clock"),
    ("leaf curling", "leaf-curl"),
    ("spore shell layering", "spore-shell"),
    ("mud gas sensing", "mud-gas"),
    ("dew capture", "dew"),
    ("glaze secretion", "glaze"),
    ("silt shedding", "silt"),
    ("shade switching", "shade"),
    ("cold gel control", "cold-gel"),
    ("proton braking", "proton-brake"),
    ("sulphide buffering", "sulphide"),
    ("water film spreading", "water-film"),
    ("gemma release", "gemma"),
    ("tip cell steering", "tip-cell"),
    ("pore waxing", "pore-wax"),
    ("dry glass formation", "dry-glass"),
    ("rewetting burst", "rewetting"),
    ("peat acid uptake", "peat-acid"),
    ("ebb signal relay", "ebb-signal"),
    ("flood breathing", "flood-breath"),
    ("pigment screening", "pigment"),
    ("drift sugar storage", "drift-sugar"),
    ("thread weaving", "thread"),
    ("wall seam closing", "wall-seam"),
    ("ion trap turnover", "ion-trap"),
    ("lamella folding", "lamella"),
    ("wound plugging", "wound-plug"),
    ("night starch pacing", "night-starch"),
    ("iron crust handling", "iron-crust"),
)
"""One process a planted group, and the word by which its complexes are called."""

PARTS = (
    "gate",
    "ring",
    "scaffold",
    "docking unit",
    "sensor",
    "relay",
    "shuttle",
    "clamp",
    "core",
    "loader",
    "brake",
    "lattice",
    "tether",
    "basket",
    "primer",
    "sieve",
)

BROAD_TERMS = (
    "salt response",
    "drying response",
    "surface upkeep",
    "submersion response",
    "growth of the shoot tip",
)
SPREAD_PATTERN = "{} and {} coupling"
SCREEN_PATTERN = "salt spray screen, plate {}"
SMALL_PATTERN = "{} switch"


def stems(rng: np.random.Generator) -> list[str]:
    """Return all stems in use, in random order: onset, vowel, coda, without those to be avoided."""
    unwanted = frozenset(f"{MONTHS} {KNOWN_GENES} {WORDS}".split())
    made = [stem for stem in map("".join, product(ONSETS, VOWELS, CODAS)) if stem not in unwanted]
    return [made[position] for position in np.argsort(rng.random(len(made)), kind="stable")]


def family_symbols(rng: np.random.Generator, count: int, pool: list[str]) -> list[str]:
    """Make symbols, family after family: 1 to 12 genes share a stem and are numbered.

    Stems are taken from the front of the pool and removed from it.
    """
    symbols: list[str] = []
    while len(symbols) < count:
        size = 1 + int(MEMBERS_PER_STEM * rng.random())
        stem = pool.pop(0)
        symbols += [f"{stem}{number}" for number in range(1, size + 1)]
    return symbols[:count]


def older_names(pool: list[str]) -> list[str]:
    """Return names of an older style, `kyvB`, from stems that no symbol uses."""
    return [f"{stem}{letter}" for letter in "ABCDEFGH" for stem in pool]


def complex_terms(rng: np.random.Generator, homes: list[int]) -> list[str]:
    """Name each complex after the process of its group: `brine sensor`; no name is given twice."""
    orders = [np.argsort(rng.random(len(PARTS)), kind="stable").tolist() for _ in PROCESSES]
    return [f"{PROCESSES[home][1]} {PARTS[orders[home].pop()]}" for home in homes]
