# Makes the stacks of this folder anew: see README.md. Needs Debian's python3-tifffile and libtiff-tools.
import os
import subprocess
import numpy
import tifffile

PAGES, HEIGHT, WIDTH = 2, 21, 29


def pixels(kind, page):
    """The formula of outside_test.go: whole numbers below 60000, then scaled to the type."""
    y, x = numpy.mgrid[0:HEIGHT, 0:WIDTH]
    v = (page * 9001 + x * 613 + y * 1237 + x * y * x * 11) % 59999
    if kind == "u8":
        return (v % 253).astype("u1")
    if kind == "u16":
        return v.astype("u2")
    return ((v - 20000) / 64).astype("f4")


def run(base, name, *options):
    subprocess.run(["tiffcp", *options, base, name], check=True)


for kind in ("u8", "u16", "f32"):
    base = f"{kind}-base.tif"
    stack = numpy.stack([pixels(kind, p) for p in range(PAGES)])
    with tifffile.TiffWriter(base, byteorder="<") as w:
        for p in stack:
            w.write(p, contiguous=False, photometric="minisblack", rowsperstrip=8, metadata=None)
    codecs = ["none", "lzw", "lzw:2", "zip", "zip:2", "packbits", "zstd", "zstd:2"]
    for codec in codecs + (["lzw:3", "zip:3", "zstd:3"] if kind == "f32" else []):
        word = codec.replace(":", "-")
        run(base, f"{kind}-{word}-little-strips.tif", "-L", "-s", "-r", "8", "-c", codec)
        if not codec.endswith(":3"):  # tiffcp 4.5.0 writes big-endian files with predictor 3 wrongly
            run(base, f"{kind}-{word}-big-tiles-bigtiff.tif", "-B", "-8", "-t", "-w", "16", "-l", "16", "-c", codec)
    os.remove(base)
    # The same pixels by the other library, in the other mixes of byte order and layout.
    for name, order, big, tile in (("big-strips", ">", False, None), ("little-tiles-bigtiff", "<", True, (16, 16))):
        with tifffile.TiffWriter(f"{kind}-tifffile-{name}.tif", byteorder=order, bigtiff=big) as w:
            for p in stack:
                w.write(p, contiguous=False, photometric="minisblack", tile=tile, compression="zlib", metadata=None)

movie = numpy.stack([[pixels("u16", t), pixels("u16", t + 100)] for t in range(4)])
tifffile.imwrite("channels.ome.tif", movie, photometric="minisblack", compression="zlib", metadata={
    "axes": "TCYX", "PhysicalSizeX": 65.0, "PhysicalSizeXUnit": "nm", "PhysicalSizeY": 0.065, "PhysicalSizeYUnit": "µm",
    "TimeIncrement": 250.0, "TimeIncrementUnit": "ms", "Channel": {"Name": ["filament", "beads"]},
    "Plane": {"DeltaT": [0.5, 0.5, 0.75, 0.75, 1.0, 1.0, 1.5, 1.5], "ExposureTime": [0.02] * 8}})
tifffile.imwrite("slices.ome.tif", numpy.stack([pixels("u16", t) for t in range(3)]), photometric="minisblack", compression="zlib",
                 metadata={"axes": "ZYX", "PhysicalSizeX": 0.1, "PhysicalSizeY": 0.1})
tifffile.imwrite("inches.tif", numpy.stack([pixels("u8", t) for t in range(2)]), photometric="minisblack", compression="zlib",
                 resolution=(254000.0, 254000.0), resolutionunit="INCH", metadata=None)
