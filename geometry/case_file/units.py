"""Units of length."""

from __future__ import annotations

LENGTHS: dict[str, float] = {
    "m": 1.0,
    "cm": 1e-2,
    "mm": 1e-3,
    "um": 1e-6,
    "µm": 1e-6,
    "μm": 1e-6,
    "nm": 1e-9,
    "mil": 25.4e-6,
    "in": 25.4e-3,
    "inch": 25.4e-3,
    "ft": 0.3048,
}
"""m. Source: ISO 80000-3; the inch is 25.4 mm exactly."""
