"""Opens a results file with every reader we promise: h5py, xarray, netCDF4 and ncdump.

usage: /usr/bin/python3 open_result.py FILE [AXIS=LENGTH ...]
Ends with 0 when all agree, else with the first fault. The values after FILE are the axis lengths to expect.
"""
import subprocess
import sys

import h5py
import netCDF4
import numpy
import xarray

TIME_SPANS = {"days", "hours", "minutes", "seconds", "milliseconds", "microseconds", "nanoseconds"}


def text(value):
    return value.decode("utf-8") if isinstance(value, bytes) else str(value)


def is_scale(data):
    return bool(h5py.h5ds.is_scale(data.id))


def look_with_h5py(path):
    """Returns {dataset: (axes, shape)} after checking scales, units and fill values."""
    layout = {}
    with h5py.File(path, "r") as file:
        assert text(file.attrs["Conventions"]) == "CF-1.8", file.attrs["Conventions"]
        for name, data in file.items():
            assert isinstance(data, h5py.Dataset), f"{name}: not a dataset"
            axes = [name] if is_scale(data) else [dim[0].name.strip("/") if len(dim) else None for dim in data.dims]
            assert None not in axes, f"{name}: a dimension without scale"
            for axis, length in zip(axes, data.shape):
                assert is_scale(file[axis]) and file[axis].shape == (length,), f"{name}: {axis} has another length"
            if data.dtype.kind == "f":
                units = text(data.attrs["units"])
                assert units and units not in TIME_SPANS, f"{name}: units {units!r}"
                if not is_scale(data):
                    fill = data.attrs["_FillValue"]
                    assert fill.shape == (1,) and fill.dtype == data.dtype and numpy.isnan(fill[0]), name
                    assert numpy.isnan(data.fillvalue), name
            elif data.dtype.kind == "i":
                values, words = data.attrs["flag_values"], text(data.attrs["flag_meanings"]).split()
                assert data.dtype == numpy.int8 and values.dtype == numpy.int8, name
                assert list(values) == list(range(len(words))), name
                assert numpy.isin(data[()], values).all(), f"{name}: a value without meaning"
            else:
                assert h5py.check_string_dtype(data.dtype).length is None, f"{name}: text of fixed length"
                assert h5py.check_string_dtype(data.dtype).encoding == "utf-8", name
                numpy.vectorize(text, otypes=[object])(data[()])
            if data.chunks:
                assert numpy.prod(data.chunks) * data.dtype.itemsize <= 1 << 20, f"{name}: chunk {data.chunks}"
            layout[name] = (tuple(axes), data.shape)
    return layout


def look_with_xarray(path, layout):
    with xarray.open_dataset(path) as results, h5py.File(path, "r") as file:
        for name, (axes, shape) in layout.items():
            seen = results[name]
            assert seen.dims == axes and seen.shape == shape, f"{name}: {seen.dims} {seen.shape}"
            assert (name in results.coords) == is_scale(file[name]), f"{name}: coordinate or not"
            assert seen.dtype.kind not in "mM", f"{name}: taken for a date or a span of time"
            if file[name].dtype.kind == "f":
                assert seen.attrs["units"] == text(file[name].attrs["units"]), name
                assert numpy.array_equal(seen.values, file[name][()], equal_nan=True), name
            elif file[name].dtype.kind == "i":
                assert seen.dtype == numpy.int8, f"{name}: {seen.dtype}"
            else:
                expected = [text(value) for value in numpy.ravel(file[name][()])]
                assert [str(value) for value in numpy.ravel(seen.values)] == expected, name
        assert set(results.variables) == set(layout), "xarray sees other items"
        for name, value in file.attrs.items():
            expected = "" if isinstance(value, h5py.Empty) else text(value)
            assert results.attrs[name] == expected, f"attribute {name}"
        str(results)


def look_with_netcdf(path, layout):
    with netCDF4.Dataset(path) as results:
        assert not results.groups
        assert set(results.variables) == set(layout), "netCDF sees other items"
        scales = {name for name, (axes, shape) in layout.items() if axes == (name,)}
        assert set(results.dimensions) == scales, f"dimensions {set(results.dimensions)}, expected {scales}"
        for name, (axes, shape) in layout.items():
            seen = results[name]
            assert seen.dimensions == axes and seen.shape == shape, f"{name}: {seen.dimensions} {seen.shape}"
            seen[...]


def look_with_ncdump(path, layout):
    for option in (["-h"], ["-s", "-h"], []):
        done = subprocess.run(["/usr/bin/ncdump", *option, path], capture_output=True)
        assert done.returncode == 0, f"ncdump {option}: {done.returncode} {done.stderr[:400]}"
        shown = done.stdout.decode("utf-8")
        for name, (axes, shape) in layout.items():
            declared = f" {name}({', '.join(axes)}) ;" if axes else f" {name} ;"
            assert declared in shown, f"ncdump {option} lacks '{declared}'"


def main():
    path, expected = sys.argv[1], dict(word.split("=") for word in sys.argv[2:])
    layout = look_with_h5py(path)
    for axis, length in expected.items():
        assert layout[axis] == ((axis,), (int(length),)), f"{axis}: {layout[axis]}, expected {length}"
    look_with_xarray(path, layout)
    look_with_netcdf(path, layout)
    look_with_ncdump(path, layout)


if __name__ == "__main__":
    main()
