"""The TOML text of random specs."""

from __future__ import annotations

from randomkernels import Tables

ORDER = ["filter", "kernel", "input", "coefficient", "intermediate", "intermediate.accumulator"]
ORDER += ["accumulator", "output", "border", "image"]


def text_of(tables: Tables) -> str:
    """The TOML text of the tables; values are TOML already."""
    blocks = [
        "\n".join([f"[{name}]", *(f"{key} = {value}" for key, value in tables[name].items())])
        for name in ORDER
        if tables.get(name) or name == "input"
    ]
    return "\n".join(blocks) + "\n"
