"""Physical constants and the limits within which the models hold.

Every constant carries its unit in the name and its source in a comment.
"""

from __future__ import annotations

import math

# Exact by definition of the SI (BIPM, SI Brochure 9th ed. 2019; CODATA 2018).
GAS_CONSTANT_J_MOL_K = 8.31446261815324
ZERO_CELSIUS_K = 273.15
STANDARD_PRESSURE_PA = 101325.0

#: Reference temperature of the ionization data, K (25 C).
REFERENCE_TEMPERATURE_K = 298.15

# Molar mass of water from IUPAC 2021 abridged atomic weights (H 1.0080, O 15.999).
WATER_MOLAR_MASS_KG_MOL = 0.018015
WATER_MOLALITY_MOL_KG = 1.0 / WATER_MOLAR_MASS_KG_MOL

LN10 = math.log(10.0)

#: Range in which pK(T) rests on measurements or their evaluation, C (273 to 350 K).
IONIZATION_LOW_C = -0.15
IONIZATION_HIGH_C = 76.85

#: Below this temperature the solver refuses to extrapolate pK, C.
EXTRAPOLATION_LIMIT_C = -20.0

#: Range in which a liquid temperature may be asked for, C.
LIQUID_LOW_C = -20.0
LIQUID_HIGH_C = 121.0

#: Ionic strength up to which the activity model was checked, mol/kg.
ACTIVITY_LIMIT_MOL_KG = 0.5
