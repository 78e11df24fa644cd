"""Types of numbers in physics: arrays of floats, and what may be given for them."""

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
Values = Array | float
