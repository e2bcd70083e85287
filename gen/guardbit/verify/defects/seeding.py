"""All mutants of a routine's sources, and a fair sample of them."""

import random
from collections.abc import Sequence

from guardbit.model.routine import Routine
from guardbit.verify.defects import places, sums, values
from guardbit.verify.defects.lexer import Source
from guardbit.verify.defects.mutant import Mutant, Operator, made

_SEED = 14_142


def mutants(routine: Routine) -> tuple[Mutant, ...]:
    """Return every mutant that the operators make of a routine's sources, each text once."""
    found: dict[tuple[str, str], Mutant] = {}
    for file in routine.sources:
        source = Source(file.name, file.text)
        for room in (sums, places, values):
            for change in room.changes(source):
                mutant = made(source, change)
                if mutant.text != file.text:
                    found.setdefault((file.name, mutant.text), mutant)
    return tuple(found.values())


def sample(every: Sequence[Mutant], most: int | None) -> tuple[Mutant, ...]:
    """Return at most that many mutants, as evenly over the operators as there are any.

    The same for the same mutants: what is picked of an operator is picked at random, seeded.
    """
    if most is None or most >= len(every):
        return tuple(every)
    rng = random.Random(_SEED)
    piles = {operator: [m for m in every if m.operator is operator] for operator in Operator}
    for pile in piles.values():
        rng.shuffle(pile)
    picked: list[Mutant] = []
    while len(picked) < most:
        for pile in piles.values():
            if pile and len(picked) < most:
                picked.append(pile.pop())
    order = {id(mutant): number for number, mutant in enumerate(every)}
    return tuple(sorted(picked, key=lambda m: order[id(m)]))
