"""(draft, being replaced) Fiber."""
from typing import Literal
import numpy as np
from optics.spec import Curve, Spec, quantity
class Fiber(Spec):
    """The fiber."""
    core_um: float = quantity("core diameter", gt=0, usual=(10, 1000))
    fiber_um: float = quantity("fiber diameter", gt=0, usual=(10, 1000))
    na: float = quantity("numerical aperture", gt=0, le=1.5, usual=(0.2, 0.9))
    core_index: float = quantity("core index", gt=1, le=3, usual=(1.4, 1.9))
    attenuation: Curve = quantity("loss of the drawn fiber, dB/m")
    material: Literal["glass", "silica", "plastic"] = quantity("what it is made of")
    allowed_strain: float = quantity("strain", gt=0, lt=1)
    highest_temperature_c: float = quantity("highest temperature", gt=0, le=1500)
    steam: bool = quantity("takes steam")
def stretch_at(*, na_of_ray, core_index):
    return 1/np.sqrt(1-(na_of_ray/core_index)**2)
