#!/usr/bin/python3
"""Makes the small files of this folder, and expected.json: what the format's
general-purpose library reads from them (or from the files given as arguments).

Needs python3-h5py 3.7 (HDF5 1.10). Run in this folder: /usr/bin/python3 make.py
All values are invented.
"""
import hashlib, json, sys
import h5py
import numpy as np

VLEN = h5py.string_dtype("ascii")


def strain(n, seed):
    """n smooth but incompressible values of the size of strain."""
    rng = np.random.default_rng(seed)
    return 1e-19 * np.cumsum(rng.standard_normal(n)) + 1e-21 * rng.standard_normal(n)


def layout(name, rate, seconds, options, start=1400000000, site="H1", gaps=False):
    """One file in the layout of open-data strain. With gaps, second 3 is flagged
    as without data and seconds 5 to 5.5 are NaN."""
    with h5py.File(name, "w", libver="earliest") as f:
        meta = f.create_group("meta")
        for key, text in [("Description", "Invented strain"), ("Detector", site), ("Observatory", site[0]),
                          ("Type", "StrainTimeSeries"), ("UTCstart", "2024-05-18T16:53:02")]:
            meta.create_dataset(key, data=text, dtype=VLEN)
        meta.create_dataset("GPSstart", data=np.int64(start))
        meta.create_dataset("Duration", data=np.int64(seconds))
        n = rate * seconds
        values = strain(n, 7)
        if gaps:
            values[5 * rate:5 * rate + rate // 2] = np.nan
        d = f.create_dataset("strain/Strain", data=values, **options)
        d.attrs["Npoints"] = np.int64(n)
        d.attrs["Xstart"] = np.int64(start)
        d.attrs["Xspacing"] = 1.0 / rate
        for key, text in [("Xlabel", "GPS time"), ("Xunits", "second"), ("Ylabel", "Strain"), ("Yunits", "")]:
            d.attrs.create(key, text, dtype=VLEN)
        mask = np.full(seconds, 127, np.uint32)
        if gaps:
            mask[3] = 126
        q = f.create_dataset("quality/simple/DQmask", data=mask, chunks=(seconds,), compression=1, fletcher32=True)
        q.attrs["Xstart"] = np.int64(start)
        q.attrs["Xspacing"] = 1.0
        q.attrs["Bits"] = np.int64(7)
        f.create_dataset("quality/simple/DQShortnames", data=np.array([b"DATA", b"CAT_A", b"CAT_B"], "S10"))
        f.create_group("quality/detail")


def types(name):
    """Every type, order of bytes and unchunked layout that is read."""
    with h5py.File(name, "w", libver="earliest") as f:
        f.attrs["title"] = np.bytes_("root attribute")
        g = f.create_group("numbers")
        for code in "bBhHiIqQ":
            for order in "<>":
                g[order.replace("<", "little_").replace(">", "big_") + np.dtype(code).name] = \
                    np.array([0, 1, 2, 100, np.iinfo(code).max >> 1, np.iinfo(code).min >> 1], order + code)
        for code in "fd":
            for order in "<>":
                g[order.replace("<", "little_").replace(">", "big_") + np.dtype(code).name] = \
                    np.array([0, -1.5, 1e-21, np.pi, np.inf, -np.inf, np.nan], order + code)
        g["matrix"] = np.arange(6.0).reshape(2, 3)
        g.create_dataset("never_written", (5,), "f8", fillvalue=2.5)
        g.create_dataset("empty", (0,), "f8")
        s = f.create_group("strings")
        s["fixed"] = np.array([b"one", b"three", b""], "S5")
        s.create_dataset("variable", data=["first", "", "the third is longer than eight bytes"], dtype=VLEN)
        s["scalar"] = np.bytes_("just one")
        # A compact dataset needs the low-level interface.
        space = h5py.h5s.create_simple((4,))
        plist = h5py.h5p.create(h5py.h5p.DATASET_CREATE)
        plist.set_layout(h5py.h5d.COMPACT)
        plist.set_obj_track_times(False)
        d = h5py.h5d.create(g.id, b"compact", h5py.h5t.IEEE_F64LE, space, plist)
        d.write(h5py.h5s.ALL, h5py.h5s.ALL, np.array([1.0, 2.0, 3.0, 4.5]))
        f["soft"] = h5py.SoftLink("/numbers/matrix")


def chunked(name):
    """Every filter, chunks that hang over the end, chunks never written, a
    chunk index of two levels, an object header with continuation blocks."""
    with h5py.File(name, "w", libver="earliest") as f:
        c = f.create_group("chunked")
        values = strain(100, 3)
        for key, options in [("plain", {}), ("shuffle_gzip", dict(shuffle=True, compression=9)),
                             ("fletcher", dict(fletcher32=True)), ("all", dict(shuffle=True, compression=1, fletcher32=True))]:
            c.create_dataset(key, data=values, chunks=(33,), **options)
        holes = c.create_dataset("holes", (100,), "f8", chunks=(10,), compression=1, fillvalue=-1.0)
        holes[25:35] = values[25:35]
        holes[95:] = values[95:]
        # Chunks to which a filter was not applied, as their filter masks say.
        masked = c.create_dataset("masked", (40,), "f8", chunks=(20,), shuffle=True, compression=1)
        masked.id.write_direct_chunk((0,), values[:20].tobytes(), 0b11)
        shuffled = values[20:40].view(np.uint8).reshape(20, 8).T.tobytes()
        masked.id.write_direct_chunk((20,), shuffled, 0b10)
        many = f.create_dataset("many_chunks", data=np.arange(400, dtype="i2"), chunks=(4,))
        for i in range(12):  # enough for continuation blocks
            many.attrs["a%02d" % i] = float(i)
        many.attrs["vector"] = np.arange(3.0)


def text(v):
    return v.decode("latin-1") if isinstance(v, bytes) else v


def read(name):
    """All datasets and attributes: strings in full, integers in full or as a
    digest, floating-point numbers as SHA-256 of their little-endian float64."""
    out = {}

    def value(v, dtype):
        if h5py.check_string_dtype(dtype) is not None:
            return {"strings": [text(x) for x in np.asarray(v, object).ravel()]}
        v = np.asarray(v)
        if v.dtype.kind == "S":
            return {"strings": [text(x) for x in v.ravel()]}
        if v.dtype.kind in "iu":
            return {"integers": [int(x) for x in v.ravel()]}
        return {"float64_sha256": hashlib.sha256(v.astype("<f8").tobytes()).hexdigest(), "n": int(v.size)}

    def visit(path, item):
        if isinstance(item, h5py.Dataset):
            out[path] = value(item[()], item.dtype)
        for key in item.attrs:
            out[path + "@" + key] = value(item.attrs[key], item.attrs.get_id(key).dtype)

    with h5py.File(name, "r") as f:
        visit("", f)
        f.visititems(visit)
    return out


if len(sys.argv) > 1:
    json.dump({n: read(n) for n in sys.argv[1:]}, sys.stdout, indent=1)
    sys.exit()
layout("contiguous.hdf5", 256, 4, {})
layout("gzip.hdf5", 256, 4, dict(chunks=(256,), compression=4), site="L1")
layout("shuffle.hdf5", 128, 8, dict(chunks=(300,), compression=4, shuffle=True), site="L1")
layout("gaps.hdf5", 32, 8, {}, gaps=True)
types("types.hdf5")
chunked("chunked.hdf5")
names = ["contiguous.hdf5", "gzip.hdf5", "shuffle.hdf5", "gaps.hdf5", "types.hdf5", "chunked.hdf5"]
with open("expected.json", "w") as f:
    json.dump({n: read(n) for n in names}, f, indent=1, sort_keys=True)
    f.write("\n")
