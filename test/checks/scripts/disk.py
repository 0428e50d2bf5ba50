"""Homogeneous dielectric disk of radius 1 and index n in vacuum.

Angular order m, field J_m(n k r) inside.  With eta = n (Ez) or 1/n (Hz):
  poles:  eta J_m'(nk) H1_m(k) - J_m(nk) H1_m'(k) = 0
  zeros:  the same with H2 (incoming), S_m = -(zero function)/(pole function),
so that the exterior field is H2_m + S_m H1_m.
Values: resonances (poles) found from a grid of Newton starts, counted by the argument
principle and refined in mpmath; lasing thresholds (real k and real Im n < 0, or
Im eps < 0, on the real axis); CPA points solved separately from the zero function;
S_m on a real-k grid and plane-wave cross sections (widths).
"""
import numpy as np, mpmath as mp
from scipy import special as sp
from common import *

mp.mp.dps = 50


def besj(m, z):
    """J_m, J_m' (mpmath)."""
    j = mp.besselj(m, z)
    return j, mp.besselj(m - 1, z) - m * j / z if m else -mp.besselj(1, z)


def hank(m, z, kind=1):
    h = mp.hankel1 if kind == 1 else mp.hankel2
    v = h(m, z)
    return v, h(m - 1, z) - m * v / z if m else -h(1, z)


def D(m, k, n, pol, kind=1):
    """Pole (kind=1) or zero (kind=2) function, mpmath."""
    eta = n if pol == "Ez" else 1 / n
    j, jp = besj(m, n * k)
    h, hp = hank(m, k, kind)
    return eta * jp * h - j * hp


def Dnp(m, n, pol):
    """Vectorised double-precision pole function of k (mild scaling only)."""
    eta = n if pol == "Ez" else 1 / n
    return lambda k: eta * sp.jvp(m, n * k) * sp.hankel1(m, k) - sp.jv(m, n * k) * sp.h1vp(m, k)


def poles(m, n, pol, kmax=None, imin=-0.8):
    kmax = kmax or float(sp.jn_zeros(m, 5)[-1]) / n + 0.25
    f = Dnp(m, n, pol)
    box = (0.05, kmax, imin, 0.05)
    r = newton_grid(f, *box, 50, 6)
    cnt, jump = winding(f, *box)
    while any(abs(z.real - kmax) < 2e-3 or abs(z.imag - imin) < 2e-3 for z in r) or len(r) != cnt:
        if kmax > 200 or imin < -1:
            break
        imin -= 0.013; kmax += 0.011
        box = (0.05, kmax, imin, 0.05)
        r = newton_grid(f, *box, 160, 15)
        cnt, jump = winding(f, *box)
    out = [mp_root(lambda k: D(m, k, mp.mpf(n), pol), z) for z in r]
    return out, cnt, box


def threshold(m, n0, pol, k0, var, kind=1):
    """(k, t): n = n0 + i t (var='n') or eps = n0^2 + i t (var='eps') on the real axis."""
    n0 = mp.mpf(n0)
    ni = n0 * k0.imag / k0.real * (1 if kind == 1 else -1)
    if var == "n":
        return mp_root2(lambda k, t: D(m, k, n0 + 1j * t, pol, kind), k0.real, ni)
    return mp_root2(lambda k, t: D(m, k, mp.sqrt(n0 ** 2 + 1j * t), pol, kind), k0.real, 2 * n0 * ni)


def S(m, k, n, pol):
    return -D(m, k, n, pol, 2) / D(m, k, n, pol, 1)


def absorbed(m, k, n, pol):
    """1 - |S|^2 from the volume integral of the dissipation (independent check)."""
    s = S(m, k, n, pol)
    h1, h2 = mp.hankel1(m, k), mp.hankel2(m, k)
    A = (h2 + s * h1) / mp.besselj(m, n * k)
    eps = n * n
    if pol == "Ez":
        g = lambda r: r * abs(A * mp.besselj(m, n * k * r)) ** 2
        return 2 * mp.pi * k * k * eps.imag * mp.quad(g, [0, 0.5, 1]) / 4
    def g(r):
        j, jp = besj(m, n * k * r)
        return r * (abs(A * n * k * jp) ** 2 + m * m * abs(A * j / r) ** 2)
    return 2 * mp.pi * eps.imag / abs(eps) ** 2 * mp.quad(g, [0, 0.5, 1]) / 4


def do_poles(c):
    n, m, pol = c
    np.random.seed(1)
    mp.mp.dps = 50
    ks, cnt, box = poles(m, n, pol)
    mp.mp.dps = 65            # independent residual: phase-matching in log-derivative form
    res = max([abs(mp.mpf(1) * (n if pol == "Ez" else 1 / mp.mpf(n)) * besj(m, n * k)[1] / besj(m, n * k)[0]
                   - hank(m, k)[1] / hank(m, k)[0]) for k in ks] or [0])
    # S vanishes at the conjugate point (zero), evaluated from the H2 function
    zr = max([abs(D(m, mp.conj(k), mp.mpf(n), pol, 2) / D(m, mp.conj(k), mp.mpf(n), pol, 1)) for k in ks] or [0])
    mp.mp.dps = 50
    return entry("disk/poles/n%s/%s/m%d" % (n, pol, m), "disk.py", "poles",
                 {"type": "disk", "radius": 1, "exterior": "vacuum"}, pol, {"n": n, "m": m},
                 {"k": ks, "Q": [-k.real / (2 * k.imag) for k in ks],
                  "zeros": [mp.conj(k) for k in ks]}, 15,
                 "Newton grid + argument principle, refined by secant at 50 digits; multiplicity 2 for m>0",
                 {"search_box_re_im": box, "argument_principle_count": cnt, "found": len(ks),
                  "log_derivative_residual": res, "abs_S_at_conjugate_zero": zr})


def do_thr(c):
    n, m, pol, idx = c
    np.random.seed(1)
    mp.mp.dps = 40
    ks, cnt, box = poles(m, n, pol)
    ks = [k for k in ks if k.imag > -0.45]
    if idx >= len(ks):
        return None
    k0 = ks[idx]
    val, chk = {"passive_pole": k0}, {}
    for var in ("n", "eps"):
        k, t = threshold(m, n, pol, k0, var)
        kz, tz = threshold(m, n, pol, mp.mpc(k0.real * mp.mpf("1.0003"), k0.imag * mp.mpf("0.97")), var, 2)
        nn = n + 1j * t if var == "n" else mp.sqrt(mp.mpf(n) ** 2 + 1j * t)
        val["laser_" + var] = {"k": k, "im_" + var: t}
        val["cpa_" + var] = {"k": kz, "im_" + var: tz}
        chk["cpa_minus_conj_laser_" + var] = max(abs(kz - k), abs(tz + t))
        chk["abs_S_at_cpa_" + var] = abs(S(m, kz, mp.conj(nn), pol))
        chk["absorbed_fraction_volume_integral_at_cpa_" + var] = absorbed(m, kz, mp.conj(nn), pol)
    return entry("disk/threshold/n%s/%s/m%d/p%d" % (n, pol, m, idx), "disk.py", "threshold",
                 {"type": "disk", "radius": 1, "exterior": "vacuum"}, pol,
                 {"n0": n, "m": m, "pole_index_by_Re_k_among_Im_k>-0.45": idx, "pump": "uniform Im n, or uniform Im eps at fixed Re eps = n0^2"},
                 val, 15, "2-real-unknown Newton at 40 digits; CPA solved separately from the H2 function", chk)


def do_S(c):
    n, pol = c
    mp.mp.dps = 30
    nn = mp.mpmathify(n) if not isinstance(n, tuple) else mp.sqrt(mp.mpc(*n[1:]))
    par = {"n": nn} if not isinstance(n, tuple) else {"eps": mp.mpc(*n[1:])}
    ks = [mp.mpf(j) / 4 for j in range(1, 25)]
    ms = list(range(0, 13))
    val = [[S(m, k, nn, pol) for m in ms] for k in ks]
    lossless = mp.im(nn ** 2) == 0
    if lossless:
        chk = {"max_abs(|S|^2-1)": max(abs(abs(v) ** 2 - 1) for r in val for v in r)}
    else:
        chk = {"max_abs(1-|S|^2 - volume dissipation)": max(
            abs(1 - abs(val[i][m]) ** 2 - absorbed(m, ks[i], mp.mpc(nn), pol)) for i in (3, 11, 19) for m in (0, 1, 4))}
    full = []
    for k in ks:
        T = [(S(m, k, nn, pol) - 1) / 2 for m in range(0, 31)]
        w = lambda g: (4 / k) * (g(T[0]) + 2 * sum(g(t) for t in T[1:]))
        full.append((w(lambda t: abs(t) ** 2), w(lambda t: -mp.re(t))))
    return entry("disk/S/%s/%s" % ("n%s" % mp.nstr(nn, 6).replace(" ", "") if not isinstance(n, tuple) else "eps%s" % (n[1:],), pol),
                 "disk.py", "S_m", {"type": "disk", "radius": 1, "exterior": "vacuum"}, pol, par,
                 {"k": ks, "m": ms, "S[k][m]": val, "plane_wave_scattering_width": [a for a, b in full],
                  "plane_wave_extinction_width": [b for a, b in full]}, 15,
                 "closed form at 30 digits; S_{-m} = S_m; widths in units of the radius (geometric width 2)", chk)
