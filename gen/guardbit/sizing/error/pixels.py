"""The least ideal value by the sum of weighted pixels."""

from guardbit.model.sizing import Interval
from guardbit.sizing.error.envelope import Envelope, Part
from guardbit.sizing.error.inputs import Inputs, Weight
from guardbit.sizing.error.table import Item


def sum_range(inputs: Inputs, values: Interval) -> Interval:
    """Return the ends of the sum of inputs of `values`."""
    low = high = inputs.amount
    for weight in inputs.weights:
        ends = (weight.amount * values.low, weight.amount * values.high)
        low += min(ends) * weight.count
        high += max(ends) * weight.count
    return Interval(low, high)


def pixel_envelope(inputs: Inputs, values: Interval, sign: int) -> Envelope:
    """Return the least sign * ideal value by the sum, over real inputs of `values`."""
    parts = [Part(_corners(weight, values, sign), weight.count) for weight in inputs.weights]
    return Envelope.of(parts, (inputs.amount, sign * inputs.ideal), 1, inputs.denominator)


def _corners(weight: Weight, values: Interval, sign: int) -> tuple[tuple[int, int], ...]:
    ends = [(weight.amount * x, sign * weight.ideal * x) for x in (values.low, values.high)]
    if not weight.amount:
        return (min(ends),)
    return tuple(sorted(ends)) if values.low < values.high else (ends[0],)


def items_of(inputs: Inputs, values: Interval, sign: int) -> tuple[list[Weight], list[Item], int]:
    """Return weights that add to the sum, each as an item of a table, and the cost without any.

    Sums are counted from the least one in steps of their greatest common divisor. An item is
    one step of an input away from the end at which it adds least.
    """
    weights, items, cost = [], [], sign * inputs.ideal
    span = values.high - values.low
    for weight in inputs.weights:
        ends = [sign * weight.ideal * x for x in (values.low, values.high)]
        if not weight.amount:
            cost += min(ends) * weight.count
            continue
        rises = weight.amount > 0
        cost += (ends[0] if rises else ends[1]) * weight.count
        each = sign * weight.ideal * (1 if rises else -1)
        weights.append(weight)
        items.append(Item(abs(weight.amount) // inputs.common, each, span * weight.count))
    return weights, items, cost
