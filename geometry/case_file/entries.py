"""Entries with materials: coatings, and what conductors have besides their shape."""

from __future__ import annotations

from typing import Any

from pydantic import Field

from nightcap.geometry.case_file.materials import MaterialKeys, MetalKeys
from nightcap.geometry.case_file.quantities import PositiveLength
from nightcap.geometry.case_file.schema import Flag


class CoatingEntry(MaterialKeys):
    """One layer of insulation."""

    thickness: PositiveLength = Field(description="Thickness of the layer.")


class ConductorKeys(MetalKeys):
    """What a conductor has besides its shape."""

    coatings: Any = Field(None, description="Layers of insulation, from the inside out.")
    floating: Flag = Field(False, description="True for a conductor without charge, e.g. an unconnected core.")
