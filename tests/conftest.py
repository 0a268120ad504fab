"""One thread of the linear algebra library in every test, as in the commands and the workers.

The systems are small: a second thread waits more than it works, and changes the last bits.
"""

import os

from threadpoolctl import threadpool_limits

threadpool_limits(limits=1)
for name in ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS"):
    os.environ.setdefault(name, "1")
