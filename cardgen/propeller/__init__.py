"""Constant-speed propeller: form, blade-element solution, table, governor."""

from cardgen.propeller.blade import (
    REFERENCE_STATION,
    Blade,
    Body,
    Propeller,
    activity_factor,
    blade_5868_9,
    blade_angle_at_reference,
    blade_angle_at_station,
    blade_from_activity_factor,
)
from cardgen.propeller.element import Coefficients, coefficients
from cardgen.propeller.governor import (
    Governing,
    blade_angle_of_attack,
    efficiency,
    governing,
    slip,
    ungoverned_rpm,
)
from cardgen.propeller.table import (
    GREATEST_TIP_MACH,
    LEAST_ADVANCE_RATIO,
    LEAST_TIP_MACH,
    CoefficientTable,
    coefficient_table,
    effective_helix_angle,
)

__all__ = [
    "GREATEST_TIP_MACH",
    "LEAST_ADVANCE_RATIO",
    "LEAST_TIP_MACH",
    "REFERENCE_STATION",
    "Blade",
    "Body",
    "CoefficientTable",
    "Coefficients",
    "Governing",
    "Propeller",
    "activity_factor",
    "blade_5868_9",
    "blade_angle_at_reference",
    "blade_angle_at_station",
    "blade_angle_of_attack",
    "blade_from_activity_factor",
    "coefficient_table",
    "coefficients",
    "effective_helix_angle",
    "efficiency",
    "governing",
    "slip",
    "ungoverned_rpm",
]
