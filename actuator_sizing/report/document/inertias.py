"""The inertia inventory as a section: each part, its inertia, and its share at the motor."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

from actuator_sizing.report.document.blocks import Column, Paragraph, Section, Table, row
from actuator_sizing.report.text import clean

if TYPE_CHECKING:
    from actuator_sizing.sizing.results import Comparison


def inertias_section(comparison: Comparison) -> Section:
    """List the parts of the inventory, referred to the driven shaft and to the motor of the leading set."""
    columns = (
        Column("Part", weight=1.8),
        Column("Shape and rule", weight=2.2),
        Column("Referred to", weight=1.2),
        Column("Mass [kg]", numeric=True),
        Column("Inertia [kg·m²]", numeric=True, weight=1.2),
        Column("At driven shaft [kg·m²]", numeric=True, weight=1.2),
        Column("At motor [kg·m²]", numeric=True, weight=1.2),
        Column("Share [%]", numeric=True, weight=0.8),
    )
    rows = tuple(
        row(
            clean(part.name, 60),
            ", ".join(text for text in (part.shape, part.rule) if text),
            part.referred_to,
            "" if math.isnan(part.mass_kg) else f"{part.mass_kg:.4g}",
            f"{part.inertia_kg_m2:.4g}",
            f"{part.at_shaft_kg_m2:.4g}",
            f"{part.at_motor_kg_m2:.4g}",
            f"{100.0 * part.share:.1f}",
        )
        for part in comparison.inertias
    )
    note = Paragraph(
        "Inertias about the axis that each part turns about, all pieces together; a part of a load that moves "
        "straight counts with its mass. Rotor, brake and gearhead of the set are not included."
    )
    return Section("inertias", "Inertia by part", (note, Table("Inertia inventory", columns, rows)))
