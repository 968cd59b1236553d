"""Makes the NPY files of this folder: numpy 1.24.2 (Debian 12), `/usr/bin/python3 make.py` in this folder."""

import numpy as np

np.save("floats.npy", np.array([[0.1, -0.0, 1e-320], [np.pi, np.inf, 2.0**53 + 2]], dtype="<f8"))
np.save("integers.npy", np.array([[[0, -1], [2**53 - 1, -(2**53 - 1)]]], dtype="<i8"))
np.save("vector.npy", np.arange(7, dtype="<i8"))
np.save("scalar.npy", np.array(2.5))
np.save("empty.npy", np.zeros((0, 3)))
np.save("beyond.npy", np.array([1, 2**53], dtype="<i8"))
np.save("fortran.npy", np.asfortranarray(np.ones((2, 3))))
np.save("single.npy", np.ones(3, dtype="<f4"))
