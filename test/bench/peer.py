"""Reads a column of a scan with Pillow and numpy, or for uncompressed TIFF with tifffile, and prints seconds and peak memory.

python3 peer.py FILE X WIDTH
"""

import json
import resource
import sys
import time

start = time.perf_counter()
import numpy as np
import tifffile
from PIL import Image

Image.MAX_IMAGE_PIXELS = None
used = time.process_time()
imported = time.perf_counter()
path, x, width = sys.argv[1], int(sys.argv[2]), int(sys.argv[3])
try:
    column = np.array(tifffile.memmap(path, mode="r")[:, x : x + width])
    how = "tifffile.memmap"
except Exception:
    picture = Image.open(path)
    column = np.asarray(picture.crop((x, 0, x + width, picture.height)))
    how = "Pillow"
print(
    json.dumps(
        {
            "seconds": time.perf_counter() - imported,
            "cpu": time.process_time() - used,
            "peak": resource.getrusage(resource.RUSAGE_SELF).ru_maxrss * 1024,
            "how": how,
            "sum": int(column.sum(dtype=np.int64)),
        }
    )
)
