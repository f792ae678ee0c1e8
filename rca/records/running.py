"""When the pump runs and when it stands, from the slow records."""

import numpy as np
import numpy.typing as npt

from rca.case.model import Case
from rca.case.series import AlignedRecord

Mask = npt.NDArray[np.bool_]
RUNNING_SHARE = 0.2  # of nominal speed; below it the pump stands or coasts
LOADED = 3.0e5  # [Pa] above atmosphere; a discharge pressure above it means the pump turns


def running_bins(case: Case, aligned: AlignedRecord) -> Mask:
    """Bins in which the shaft turns; all of them where no speed is on record."""
    speed = aligned.get("shaft speed")
    if speed is None:
        discharge = aligned.get("discharge pressure")
        if discharge is None:
            return np.ones(aligned.time_s.shape, dtype=bool)
        return np.nan_to_num(discharge.mean, nan=0.0) > 1.013e5 + LOADED
    if not np.isfinite(speed.mean).any():
        return np.zeros(aligned.time_s.shape, dtype=bool)
    nominal = case.pump.speed.value if case.pump.speed else float(np.nanmax(speed.mean))
    return np.nan_to_num(speed.mean, nan=0.0) > RUNNING_SHARE * nominal


def standing_bins(aligned: AlignedRecord) -> Mask:
    """Bins in which the shaft stands; none where no speed is on record."""
    speed = aligned.get("shaft speed")
    if speed is None or not np.isfinite(speed.mean).any():
        return np.zeros(aligned.time_s.shape, dtype=bool)
    return np.nan_to_num(speed.high, nan=1.0) < 0.02 * float(np.nanmax(speed.mean))
