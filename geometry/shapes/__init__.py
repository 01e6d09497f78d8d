"""Shapes that conductors, dielectrics and boundaries take, each giving its exact closed outline."""

from __future__ import annotations

from nightcap.geometry.shapes.bent_strip import BentStrip
from nightcap.geometry.shapes.circle import Circle, Ring
from nightcap.geometry.shapes.lapped_strip import LappedStrip
from nightcap.geometry.shapes.outline import Outline, Shape, chains, signed_area
from nightcap.geometry.shapes.parallel import Grown
from nightcap.geometry.shapes.polygon import Polygon
from nightcap.geometry.shapes.rectangle import Rectangle
from nightcap.geometry.shapes.sector import Sector
from nightcap.geometry.shapes.smooth import Ellipse, Smooth, Traced
from nightcap.geometry.shapes.union import Strands, Union, parts_of

__all__ = [
    "BentStrip",
    "Circle",
    "Ellipse",
    "Grown",
    "LappedStrip",
    "Outline",
    "Polygon",
    "Rectangle",
    "Ring",
    "Sector",
    "Shape",
    "Smooth",
    "Strands",
    "Traced",
    "Union",
    "chains",
    "parts_of",
    "signed_area",
]
