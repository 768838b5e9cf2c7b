"""What a run leaves on disk: fields, stations, ledger, checkpoints, summary, and the folder that holds them.

Everything here runs on one rank with arrays of the whole mesh.
"""

import os

# HDF5 locks a file that it writes, so that nobody could look into a running result, and a viewer that was quicker would
# stop the run. Who writes is settled by our own lock (`lock`). HDF5 reads this once, when netCDF4 is first imported.
os.environ.setdefault("HDF5_USE_FILE_LOCKING", "FALSE")
