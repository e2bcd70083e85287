"""One spec for everything that changes the emitted C, by name."""

from fit.specs import spec
from guardbit.model.spec import Spec

from .parts import Tables
from .places import GEOMETRY, KERNELS, PEDESTALS, borders, inputs
from .sums import registers, roundings, shifts, two_passes


def cases() -> dict[str, Spec]:
    """The specs by name; the name is the filter's as well."""
    tables = {
        **borders(),
        **GEOMETRY,
        **KERNELS,
        **inputs(),
        **PEDESTALS,
        **roundings(),
        **shifts(),
        **registers(),
        **two_passes(),
    }
    return {name: _named(name, table) for name, table in tables.items()}


def _named(name: str, tables: Tables) -> Spec:
    return spec(**{**tables, "filter": {**tables.get("filter", {}), "name": name}})
