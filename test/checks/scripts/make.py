"""Makes disk-modes.json, layered-modes.json and cluster-modes.json: poles and thresholds of disks, concentric layers and clusters.

usage: python3 make.py disk|layered|cluster   (Python 3, numpy, scipy, mpmath; gmpy2 makes `cluster` faster and is optional)

disk      every pole with Q >= 2 of each order m, one octave of k at a time: Newton grid, the count of the argument
          principle over a box down to Im k = -0.27 Re k, secant on the exact transcendental equation at 50 digits.
layered   as layered.py says, boxes down to Im k = -0.6.
cluster   as cluster.py says, inside the ellipses listed.
Decimal parameters are the nearest IEEE doubles; radii 1 (disk, outermost layer) and as listed (cluster).
"""
import json, sys
from multiprocessing import Pool
import numpy as np, mpmath as mp
import disk, layered, cluster
from common import CONVENTIONS, newton_grid, num, winding, mp_root

OCTAVES = [(0.25, 0.5), (0.5, 1), (1, 2), (2, 2.5), (2.5, 5), (5, 10), (10, 20)]
LOW_Q = 2


def disk_poles(c):
    """All poles of one order with 0.25 <= Re k <= kmax and Q >= 2."""
    n, m, pol, kmax = c
    np.random.seed(1)
    mp.mp.dps = 50
    f, out, counts = disk.Dnp(m, n, pol), [], []
    for a, b in OCTAVES:
        if b > kmax:
            continue
        # a box of its own, moved a little when a pole lies on its edge
        box = [a - 1e-3, b + 1e-3, -0.27 * b, 0.02]
        for attempt in range(8):
            r = newton_grid(f, *box, *((40, 8) if attempt == 0 else (160, 30)))
            count, jump = winding(f, *box)
            if len(r) == count:
                break
            box = [box[0] - 1.1e-3, box[1] + 1.3e-3, box[2] * 1.004, box[3]]
        if len(r) != count:
            raise ArithmeticError("%s: found %d of %d in %s" % (c, len(r), count, box))
        counts.append([a, b, count])
        ks = [mp_root(lambda k: disk.D(m, k, mp.mpf(n), pol), z) for z in r]
        out += [k for k in ks if a <= k.real <= b and k.real >= -2 * LOW_Q * k.imag]
    out.sort(key=lambda k: k.real)
    return num({"n": n, "pol": pol, "m": m, "to": kmax, "k": out})


def disk_threshold(c):
    e = disk.do_thr(c)
    if not e:
        return None
    v = e["values"]
    return {"n": c[0], "pol": c[2], "m": c[1], "pole": v["passive_pole"], "k": v["laser_eps"]["k"], "D": -v["laser_eps"]["im_eps"]}


LAYERED = {
    "core_shell": dict(radii=[0.5, 1.0], eps=[9.0, 2.25]),
    "ring": dict(radii=[0.6, 1.0], eps=[1.0, 6.25]),
    "metal_core": dict(radii=[0.4, 1.0], eps=[-10 + 0.5j, 4.0]),
    "three_layer": dict(radii=[0.4, 0.7, 1.0], eps=[2.25, 12.0, 2.25]),
}
LAYERED_POLES = [(n, LAYERED[n], p, m, 5.0) for n in LAYERED for p in ("Ez", "Hz") for m in (0, 1, 2, 3, 5, 8)]
LAYERED_THRESHOLDS = [("core_shell", LAYERED["core_shell"], p, m, [0], kg) for p in ("Ez", "Hz") for m, kg in ((2, 2.0), (3, 2.5), (4, 3.0))] + \
    [("ring", LAYERED["ring"], p, m, [1], kg) for p in ("Ez", "Hz") for m, kg in ((4, 3.0), (6, 4.0))] + \
    [("metal_core", LAYERED["metal_core"], p, m, [1], kg) for p in ("Ez", "Hz") for m, kg in ((3, 2.5), (5, 3.6))] + \
    [("three_layer", LAYERED["three_layer"], p, 3, [j], 2.5) for j in (0, 1) for p in ("Ez", "Hz")]

PAIR = dict(pos=[(-1.15, 0), (1.15, 0)], rad=[1, 1], eps=[4, 4], pol="Ez", N=28, kref=3.0, sym=True)
WIDE = dict(PAIR, pos=[(-1.4, 0), (1.4, 0)])
FIVE = dict(pos=[(0, 0), (1.9, 0.6), (-0.7, 2.1), (-1.8, -1.2), (1.0, -2.0)], rad=[0.8, 0.7, 0.9, 0.75, 0.85], eps=[6.25] * 5, pol="Ez", N=20, kref=2.2)
LOSSY = dict(FIVE, eps=[6.25, 6.25 + 0.03j, 6.25 + 0.03j, 6.25 + 0.03j, 6.25 + 0.03j])
TWELVE = dict(pos=[(2.304, 1.599), (-1.594, -1.159), (-2.869, 1.863), (1.723, -0.186), (-0.319, 0.026), (0.709, 2.836), (-1.971, 0.653),
                   (-2.645, -2.693), (-1.464, -2.832), (1.914, -2.004), (0.569, -2.556), (0.8, 1.023)],
              rad=[0.6, 0.5, 0.4, 0.6, 0.4, 0.5, 0.5, 0.4, 0.4, 0.4, 0.6, 0.5], eps=[9.0] * 12, pol="Ez", N=18, kref=2.2)
hz = lambda G: dict(G, pol="Hz")
CLUSTER_POLES = [("pair", PAIR, [(3.0 - 0.08j, 0.35, 0.15), (4.0 - 0.03j, 0.25, 0.029)]), ("wide_pair", WIDE, [(3.0 - 0.08j, 0.3, 0.12)]),
                 ("pair", hz(PAIR), [(3.4 - 0.15j, 0.3, 0.14)]), ("five", FIVE, [(2.2 - 0.08j, 0.2, 0.079)]),
                 ("five", hz(FIVE), [(2.2 - 0.08j, 0.3, 0.079)]), ("twelve", TWELVE, [(2.4 - 0.04j, 0.1, 0.039)]),
                 ("twelve", hz(TWELVE), [(2.35 - 0.06j, 0.15, 0.05)])]
CLUSTER_THRESHOLDS = [("pair", PAIR, pu, k, t) for k, t in ((2.99338 - 0.04628j, -0.13), (3.08200 - 0.04651j, -0.12), (3.05819 - 0.07937j, -0.2))
                      for pu in ([0, 1], [0]) if (k.real, pu) != (3.05819, [0])] + \
    [("five", FIVE, [2], 2.17655 - 0.02951j, -0.227), ("five", FIVE, [0], 2.44599 - 0.0232j, -0.162), ("five", FIVE, [4], 2.29270 - 0.02944j, -0.213),
     ("five", hz(FIVE), [2], 2.39344 - 0.07059j, -0.887), ("five", hz(FIVE), [3], 2.09486 - 0.05152j, -0.892),
     ("five_lossy", LOSSY, [0], 2.44599 - 0.028j, -0.162),
     ("twelve", TWELVE, [1], 2.38572 - 0.01074j, -0.169), ("twelve", TWELVE, [10], 2.03029 - 0.02221j, -0.333),
     ("twelve", hz(TWELVE), [1], 2.44228 - 0.02413j, -0.351), ("twelve", hz(TWELVE), [6], 2.46719 - 0.03604j, -0.557)]


def crossing(e):
    """Thresholds as positive D; the absorbing twin of a lossy structure in its own right."""
    v = e["values"]
    own = v.get("cpa_of_this_structure") or (v.get("cpa") if "cpa_of_conjugate_structure" in v else None)
    out = {"pole": v["passive_pole"], "k": v["laser"]["k"], "D": -v["laser"]["t"]}
    if own:
        out["absorber"] = {"k": own["k"], "D": own["t"]}
    return out


def layered_poles(c):
    e = layered.do_poles(c)
    return {"name": c[0], "pol": c[2], "m": c[3], "k": e["values"]["k"]} if e["values"]["k"] else None


def layered_threshold(c):
    e = layered.do_thr(c)
    return {"name": c[0], "pol": c[2], "m": c[3], "pumped": c[4], **crossing(e)} if e else None


def cluster_poles(c):
    e = cluster.do_poles(c)
    return {"name": c[0], "pol": c[1]["pol"], "ellipses": [[z.real, z.imag, a, b] for z, a, b in c[2]], "k": e["values"]["k"]}


def cluster_threshold(c):
    e = cluster.do_thr(c)
    return {"name": c[0], "pol": c[1]["pol"], "pumped": c[2], **crossing(e)} if e else None


def bodies(G):
    return num([{"x": x, "y": y, "radius": r, "eps": e} for (x, y), r, e in zip(G["pos"], G["rad"], G["eps"])])


def write(name, source, **parts):
    with open("../%s.json" % name, "w") as f:
        f.write('{"source": %s,\n "conventions": %s' % (json.dumps(source), json.dumps(CONVENTIONS)))
        for key, value in parts.items():
            if isinstance(value, list):
                f.write(',\n "%s": [\n' % key + ",\n".join("  " + json.dumps(v) for v in value if v) + "\n ]")
            else:
                f.write(',\n "%s": %s' % (key, json.dumps(value)))
        f.write("\n}\n")


if __name__ == "__main__":
    with Pool(2) as p:
        if "disk" in sys.argv:
            N = [(n, pol) for n in (1.5, 2.0, 3.3) for pol in ("Ez", "Hz")]
            poles = p.map(disk_poles, [(n, m, pol, 20.0) for n, pol in N for m in range(11)] + [(n, m, pol, 5.0) for n, pol in N for m in range(11, 25)], 1)
            thr = p.map(disk_threshold, [(n, m, pol, i) for n, pol in N for m in (0, 1, 4, 7, 10) for i in (0, 2)], 1)
            write("disk-modes", "mpmath 50 digits: secant on the exact transcendental equation of each order, counted by the argument principle; thresholds: Newton in (k, Im eps) at 40 digits (scripts/disk.py, scripts/make.py). Radius 1, vacuum outside; multiplicity 2 for m > 0.", lowest=0.25, lowQ=LOW_Q, poles=[e for e in poles if e["k"]], thresholds=thr)
        if "layered" in sys.argv:
            write("layered-modes", "mpmath 40 digits: transfer through the layers, secant on the exact transcendental equation, argument principle count; thresholds: Newton in (k, t), checked by integrating the radial equation (scripts/layered.py, scripts/make.py). Outer radius 1, vacuum outside; multiplicity 2 for m > 0; poles complete for Im k > -0.6, 0.1 < Re k < 5 of the orders listed.",
                  structures=num(LAYERED), poles=p.map(layered_poles, LAYERED_POLES, 1), thresholds=p.map(layered_threshold, LAYERED_THRESHOLDS, 1))
        if "cluster" in sys.argv:
            write("cluster-modes", "Multipole expansion with the addition theorem, contour search, bordered Newton at 32 digits with mpmath (scripts/cluster.py, scripts/make.py). Poles complete inside the ellipses [Re, Im, half axes].",
                  structures={n: bodies(G) for n, G in (("pair", PAIR), ("wide_pair", WIDE), ("five", FIVE), ("five_lossy", LOSSY), ("twelve", TWELVE))},
                  poles=p.map(cluster_poles, CLUSTER_POLES, 1), thresholds=p.map(cluster_threshold, CLUSTER_THRESHOLDS, 1))
