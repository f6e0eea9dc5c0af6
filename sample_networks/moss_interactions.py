"""Interactions of the invented saltmarsh moss, drawn from its plan.

1. Every pair of proteins has a rate, the sum over the layers COMPLEX, GROUP, BRIDGE, CROSSTALK and REGION; the pair
   interacts with probability `1 - exp(-rate)`. Crosstalk, between groups, is commoner inside a programme.
2. A share of these true interactions is lost, as if never observed.
3. The small components are added, whole.
4. False interactions are added between random pairs, more often at proteins of high propensity.
5. Each interaction gets a confidence: logistic-normal, lower for false ones, with much overlap.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import IntEnum
from typing import Any

import numpy as np
from moss_plan import GROUPS, PROGRAMME, PROTEINS, REGION_SIZE, Floats, Ints, Plan
from numpy.typing import NDArray

LOST_SHARE = 0.12
FALSE_SHARE = 0.14


class Layer(IntEnum):
    """Where an interaction comes from; where two layers hold, the earlier one is named."""

    COMPLEX = 0
    GROUP = 1
    BRIDGE = 2
    CROSSTALK = 3
    REGION = 4
    SMALL = 5
    FALSE = 6


# Mean of the logit of the confidence in each layer; its standard deviation is CONFIDENCE_SPREAD.
CONFIDENCE_LOGIT = {
    Layer.COMPLEX: 1.2,
    Layer.GROUP: 0.6,
    Layer.BRIDGE: 0.7,
    Layer.CROSSTALK: 0.3,
    Layer.REGION: 0.4,
    Layer.SMALL: 0.8,
    Layer.FALSE: -0.6,
}
CONFIDENCE_SPREAD = 0.75


@dataclass(frozen=True)
class Interactions:
    """Interactions between proteins given by position, each pair once, first position below second.

    Attributes
    ----------
    pairs : int array, shape (interactions, 2)
    layer : int array, shape (interactions,)
        A `Layer` each.
    confidence : float array, shape (interactions,)
        Above 0 and below 1, three decimals.
    """

    pairs: Ints
    layer: Ints
    confidence: Floats


def complex_density(size: int) -> float:
    """Return the aimed share of pairs that interact in a complex: less, the larger it is."""
    return float(min(0.9, 1.75 * size**-0.45))


def complex_rates(plan: Plan) -> Floats:
    """Rate of each pair from the complexes; the square root tempers the propensities."""
    rates = np.zeros((PROTEINS, PROTEINS))
    for unit in plan.complexes:
        pull = np.sqrt(plan.propensity[unit.members])
        pull /= pull.mean()
        rates[np.ix_(unit.members, unit.members)] -= np.outer(pull, pull) * np.log1p(
            -complex_density(len(unit.members))
        )
    return rates


def degree_rates(plan: Plan, allowed: NDArray[Any], expected: float) -> Floats:
    """Rate proportional to both propensities (Chung & Lu 2002) and to `allowed`, scaled to a sum.

    `allowed` is symmetric, shape (PROTEINS, PROTEINS), 0 where the layer has no pairs; `expected` counts each pair
    once.
    """
    rates = np.outer(plan.propensity, plan.propensity) * allowed
    return np.asarray(rates * (2 * expected / rates.sum()))


def group_rates(plan: Plan) -> Floats:
    """Rate of each pair from its group: looser than a complex, driven by the propensities."""
    rates = np.zeros((PROTEINS, PROTEINS))
    for number in range(GROUPS):
        inside = plan.group_of == number
        rates += degree_rates(plan, np.outer(inside, inside), 1.6 * float(inside.sum()))
    return rates


def bridge_rates(plan: Plan) -> Floats:
    """Rate of each pair of a bridge and a protein in a complex it reaches into: about five partners each."""
    rates = np.zeros((PROTEINS, PROTEINS))
    for protein, reached in plan.bridges.items():
        for position in reached:
            others = plan.complexes[position].members
            rates[protein, others] += 5.0 / len(others)
            rates[others, protein] += 5.0 / len(others)
    return rates


def crosstalk_rates(plan: Plan) -> Floats:
    """Rate of each pair in two groups, or in a group and the region: tenfold inside a programme."""
    home = plan.group_of.copy()
    home[plan.region] = GROUPS
    programme = home // PROGRAMME
    apart = (home[:, None] != home[None, :]) & np.outer(home >= 0, home >= 0)
    allowed = apart * np.where(programme[:, None] == programme[None, :], 10.0, 1.0)
    return degree_rates(plan, allowed, 1.0 * PROTEINS)


def layer_rates(plan: Plan) -> dict[Layer, Floats]:
    """Return the rate of every pair in every layer that has rates, the first layer first."""
    region = np.isin(np.arange(PROTEINS), plan.region)
    return {
        Layer.COMPLEX: complex_rates(plan),
        Layer.GROUP: group_rates(plan),
        Layer.BRIDGE: bridge_rates(plan),
        Layer.CROSSTALK: crosstalk_rates(plan),
        Layer.REGION: degree_rates(plan, np.outer(region, region), 3.2 * REGION_SIZE),
    }


def true_pairs(rng: np.random.Generator, plan: Plan) -> tuple[Ints, Ints]:
    """Draw the interactions that hold in the invented moss; return pairs and layers."""
    rates = layer_rates(plan)
    total = np.triu(sum(rates.values(), np.zeros((PROTEINS, PROTEINS))), 1)
    first, second = np.nonzero(rng.random(total.shape) < -np.expm1(-total))
    layer = np.full(len(first), int(Layer.REGION))
    for name in reversed(rates):
        layer[rates[name][first, second] > 0] = int(name)
    return np.column_stack([first, second]), layer


def small_pairs(rng: np.random.Generator, plan: Plan) -> Ints:
    """Join each small component by a random tree, and each of its other pairs with probability 0.3."""
    pairs = []
    for members in plan.small:
        for place in range(1, len(members)):
            parent = int(place * rng.random())
            pairs += [
                (int(members[other]), int(members[place]))
                for other in range(place)
                if other == parent or rng.random() < 0.3
            ]
    return np.array(pairs)


def false_pairs(rng: np.random.Generator, plan: Plan, known: Ints, count: int) -> Ints:
    """Draw distinct pairs that do not truly interact, outside the small components.

    An end is drawn in proportion to the propensity to the power 0.85: much-studied proteins collect more errors.
    """
    weight = plan.propensity**0.85
    weight[np.concatenate(plan.small)] = 0.0
    steps = np.cumsum(weight) / weight.sum()
    ends = np.searchsorted(steps, rng.random((3 * count, 2)))
    ends.sort(axis=1)
    codes = ends[:, 0] * PROTEINS + ends[:, 1]
    fresh = (ends[:, 0] < ends[:, 1]) & ~np.isin(codes, known[:, 0] * PROTEINS + known[:, 1])
    _, first_seen = np.unique(codes[fresh], return_index=True)
    return np.asarray(ends[fresh][np.sort(first_seen)[:count]])


def draw_confidence(rng: np.random.Generator, layer: Ints) -> Floats:
    """Draw a logistic-normal confidence for each interaction, three decimals."""
    logit = np.array([CONFIDENCE_LOGIT[name] for name in Layer])[layer]
    raw = 1.0 / (1.0 + np.exp(-logit - CONFIDENCE_SPREAD * rng.standard_normal(len(layer))))
    return np.asarray(np.clip(np.round(raw, 3), 0.05, 0.999))


def make_interactions(rng: np.random.Generator, plan: Plan) -> Interactions:
    """Draw the true interactions, lose some, add the small components and the false ones."""
    whole, whole_layer = true_pairs(rng, plan)
    seen = rng.random(len(whole)) >= LOST_SHARE
    small = small_pairs(rng, plan)
    observed = int(seen.sum()) + len(small)
    wrong = false_pairs(rng, plan, whole, round(observed * FALSE_SHARE / (1 - FALSE_SHARE)))
    pairs = np.concatenate([whole[seen], small, wrong])
    layer = np.concatenate(
        [whole_layer[seen], np.full(len(small), int(Layer.SMALL)), np.full(len(wrong), int(Layer.FALSE))]
    )
    return Interactions(pairs, layer, draw_confidence(rng, layer))
