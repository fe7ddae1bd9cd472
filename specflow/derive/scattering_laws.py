"""The laws of network files: of one entry, of its phase, of several entries, of modes, and of noise parameters."""

from __future__ import annotations

from specflow.derive.law import Law
from specflow.derive.scattering import ENTRY_LAWS
from specflow.derive.scattering_modes import MODE_LAWS
from specflow.derive.scattering_noise import NOISE_LAWS
from specflow.derive.scattering_paths import PATH_LAWS
from specflow.derive.scattering_phase import PHASE_LAWS

SCATTERING_LAWS: tuple[Law, ...] = (*ENTRY_LAWS, *PHASE_LAWS, *PATH_LAWS, *MODE_LAWS, *NOISE_LAWS)
