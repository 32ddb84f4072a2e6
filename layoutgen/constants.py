"""Physical constants in SI units (CODATA 2018, rounded as published)."""

from __future__ import annotations

SPEED_OF_LIGHT = 299_792_458.0
"""Speed of light in vacuum. [m/s]"""

VACUUM_PERMITTIVITY = 8.8541878128e-12
"""Electric constant. [F/m]"""

VACUUM_PERMEABILITY = 1.25663706212e-6
"""Magnetic constant. [H/m]"""

VACUUM_IMPEDANCE = VACUUM_PERMEABILITY * SPEED_OF_LIGHT
"""Wave impedance of vacuum. [ohm]"""
