"""Concentric multilayer cylinder (outer radius 1, any eps per layer) in vacuum.

The pair (u, w), w = u' (Ez) or u'/eps (Hz), is carried from the centre outwards as
  u = A J_m(q r) + B Y_m(q r),  q = sqrt(eps) k,
matching u and w at each interface; at the outer radius R
  pole: w H1_m(kR) - u k H1_m'(kR) = 0,  zero: the same with H2,
  S_m = -(zero function)/(pole function).
A perfectly conducting centre may be given instead of a core ("pec": u = 0 (Ez) or
u' = 0 (Hz) at the inner radius).  Threshold pump: eps_j -> eps_j + i t in chosen layers.
Independent check: Riccati-type ODE integration of the radial equation (8th order
Runge-Kutta, double precision), which shares no formula with the above.
"""
import numpy as np, mpmath as mp
from scipy import special as sp
from scipy.integrate import solve_ivp
from common import *

mp.mp.dps = 40


def cyl(m, z, lib):
    """J, J', Y, Y' at z."""
    if lib is mp:
        j, y = mp.besselj(m, z), mp.bessely(m, z)
        if m == 0:
            return j, -mp.besselj(1, z), y, -mp.bessely(1, z)
        return j, mp.besselj(m - 1, z) - m * j / z, y, mp.bessely(m - 1, z) - m * y / z
    j, h = sp.jv(m, z), sp.hankel1(m, z)        # Y from H1 is faster than yv for complex z
    j1, h1 = (sp.jv(m - 1, z), sp.hankel1(m - 1, z)) if m else (-sp.jv(1, z), -sp.hankel1(1, z))
    jp, hp = (j1 - m * j / z, h1 - m * h / z) if m else (j1, h1)
    return j, jp, h, hp


def outer_uw(m, k, st, pol, lib=mp, trace=None):
    """(u, w) at the outer radius; st = {'radii': [...], 'eps': [...], 'core': 'pec' or None}."""
    sq = mp.sqrt if lib is mp else (lambda x: np.sqrt(complex(x)))
    rad, eps = st["radii"], st["eps"]
    f = (lambda e: 1) if pol == "Ez" else (lambda e: 1 / e)
    if st.get("core") == "pec":
        r0, rest = rad[0], list(zip(rad[1:], eps))
        u, w = (0 * k, 1 + 0 * k) if pol == "Ez" else (1 + 0 * k, 0 * k)
    else:
        q = sq(eps[0]) * k
        j, jp, _, _ = cyl(m, q * rad[0], lib) if lib is not mp else (*_jj(m, q * rad[0]), 0, 0)
        u, w = j, f(eps[0]) * q * jp
        if trace is not None:
            trace.append((0, rad[0], eps[0], q, 1, 0))
        r0, rest = rad[0], list(zip(rad[1:], eps[1:]))
    for r1, e in rest:
        q = sq(e) * k
        j, jp, y, yp = cyl(m, q * r0, lib)
        # Wronskians: J Y' - J' Y = 2/(pi z) (mpmath branch), J H1' - J' H1 = 2i/(pi z) (double branch)
        c = mp.pi * q * r0 / 2 if lib is mp else np.pi * q * r0 / 2j
        d = w / (f(e) * q)
        A, B = c * (u * yp - d * y), c * (d * j - u * jp)
        if trace is not None:
            trace.append((r0, r1, e, q, A, B))
        j, jp, y, yp = cyl(m, q * r1, lib)
        u, w = A * j + B * y, f(e) * q * (A * jp + B * yp)
        r0 = r1
    return u, w


def _jj(m, z):
    j = mp.besselj(m, z)
    return j, (mp.besselj(m - 1, z) - m * j / z if m else -mp.besselj(1, z))


def D(m, k, st, pol, kind=1, lib=mp):
    R = st["radii"][-1]
    u, w = outer_uw(m, k, st, pol, lib)
    if lib is mp:
        h = mp.hankel1 if kind == 1 else mp.hankel2
        v = h(m, k * R)
        vp = h(m - 1, k * R) - m * v / (k * R) if m else -h(1, k * R)
    else:
        v, vp = (sp.hankel1(m, k * R), sp.h1vp(m, k * R)) if kind == 1 else (sp.hankel2(m, k * R), sp.h2vp(m, k * R))
    return w * v - u * k * vp


def pumped(st, layers, t):
    return dict(st, eps=[e + (1j * t if i in layers else 0) for i, e in enumerate(st["eps"])])


def conj(st):
    return dict(st, eps=[mp.conj(e) for e in st["eps"]])


def S(m, k, st, pol):
    return -D(m, k, st, pol, 2) / D(m, k, st, pol, 1)


def ode_logder(m, k, st, pol):
    """w/u at the outer radius by ODE integration (double precision), independent check."""
    f = (lambda e: 1) if pol == "Ez" else (lambda e: 1 / e)
    k, rad = complex(k), [float(r) for r in st["radii"]]
    eps = [complex(e) for e in st["eps"]]
    if st.get("core") == "pec":
        y, r, lay = np.array([0, 1], complex) if pol == "Ez" else np.array([1, 0], complex), rad[0], list(zip(rad[1:], eps))
    else:
        r = 0.02 * rad[0]                       # power series start
        q2 = eps[0] * k * k
        s = [1.0]
        for p in range(1, 12):
            s.append(-s[-1] * q2 / (4 * p * (p + m)))
        u = sum(c * r ** (2 * p) for p, c in enumerate(s))
        du = sum(c * (m + 2 * p) * r ** (2 * p - 1) for p, c in enumerate(s))
        y, lay = np.array([u, f(eps[0]) * du]), list(zip(rad, eps))
    for r1, e in lay:
        rhs = lambda r, y, e=e: np.array([y[1] / f(e), f(e) * (m * m / r ** 2 - e * k * k) * y[0] - y[1] / r])
        y = solve_ivp(rhs, (r, r1), y / np.max(np.abs(y)), method="DOP853", rtol=1e-13, atol=1e-15).y[:, -1]
        r = r1
    return y[1] / y[0]


def absorbed(m, k, st, pol):
    """1 - |S|^2 by volume integration of the dissipation."""
    tr = []
    u, w = outer_uw(m, k, st, pol, mp, tr)
    R = st["radii"][-1]
    s = S(m, k, st, pol)
    C = (mp.hankel2(m, k * R) + s * mp.hankel1(m, k * R)) / u
    tot = 0
    for r0, r1, e, q, A, B in tr:
        e = mp.mpc(e)
        if e.imag == 0:
            continue
        def g(r):
            if r == 0:
                return mp.mpf(0)
            j, jp = _jj(m, q * r)
            v, vp = A * j, q * A * jp
            if B != 0:
                j, jp, y, yp = cyl(m, q * r, mp)
                v, vp = A * j + B * y, q * (A * jp + B * yp)
            if pol == "Ez":
                return r * abs(v) ** 2
            return r * (abs(vp) ** 2 + m * m * abs(v / r) ** 2)
        I = mp.quad(g, [r0, (r0 + r1) / 2, r1])
        tot += I * (k * k * e.imag if pol == "Ez" else e.imag / abs(e) ** 2)
    return 2 * mp.pi * abs(C) ** 2 * tot / 4


def mpst(st):
    return dict(st, radii=[mp.mpf(r) for r in st["radii"]], eps=[mp.mpmathify(e) for e in st["eps"]])


def do_poles(c):
    name, st, pol, m, kmax = c
    np.random.seed(1)
    mp.mp.dps = 40
    ks, cnt, box = find(m, st, pol, kmax)
    M = mpst(st)
    ode = 0
    for k in ks:
        R = M["radii"][-1]
        ld = complex(k * (mp.hankel1(m - 1, k * R) / mp.hankel1(m, k * R) - m / (k * R)) if m else -k * mp.hankel1(1, k * R) / mp.hankel1(0, k * R))
        ode = max(ode, abs(ode_logder(m, k, st, pol) / ld - 1))
    zc = max([abs(D(m, mp.conj(k), conj(M), pol, 2) / D(m, mp.conj(k), conj(M), pol, 1)) for k in ks] or [0])
    return entry("layered/poles/%s/%s/m%d" % (name, pol, m), "layered.py", "poles",
                 dict(type="concentric layers", name=name, exterior="vacuum", **{k: v for k, v in st.items()}), pol,
                 {"m": m}, {"k": ks}, 14,
                 "transfer through the layers, Newton grid + argument principle, secant at 40 digits",
                 {"search_box_re_im": box, "argument_principle_count": cnt, "found": len(ks),
                  "ode_integration_relative_difference_of_log_derivative": ode,
                  "abs_S_of_conjugate_structure_at_conj_k": zc})


def find(m, st, pol, kmax, imin=-0.6, re0=0.1):
    f = lambda k: D(m, k, st, pol, 1, np)
    box = [re0, kmax, imin, 0.05]
    for _ in range(6):
        r = newton_grid(f, *box, 40, 5)
        cnt, _j = winding(f, *box)
        if len(r) != cnt:
            r = newton_grid(f, *box, 120, 13)
        if len(r) == cnt and all(abs(z.real - box[1]) > 2e-3 and abs(z.imag - box[2]) > 2e-3 for z in r):
            break
        box[1] += 0.011; box[2] -= 0.013
    M = mpst(st)
    return [mp_root(lambda k: D(m, k, M, pol), z) for z in r], cnt, box


def do_thr(c):
    name, st, pol, m, layers, kguess = c
    np.random.seed(1)
    mp.mp.dps = 40
    M = mpst(st)
    ks, cnt, box = find(m, st, pol, kguess + 0.7, imin=-0.25, re0=max(0.1, kguess - 0.7))
    if not ks:
        return None
    k0 = min(ks, key=lambda k: abs(k - kguess))
    # follow the pole to the real axis by a secant on the pump
    t0, t1, ka = mp.mpf(0), mp.mpf("-0.02"), k0
    for _ in range(60):
        kb = mp_root(lambda k: D(m, k, pumped(M, layers, t1), pol), ka, mp.mpf(10) ** -12)
        if abs(kb.imag) < mp.mpf(10) ** -8:
            break
        t2 = t1 - kb.imag * (t1 - t0) / (kb.imag - ka.imag)
        t2 = t1 + max(min(t2 - t1, mp.mpf("0.15")), mp.mpf("-0.15"))
        t0, t1, ka = t1, t2, kb
        if t1 < -4:
            return None                             # no sensible threshold
    k, t = mp_root2(lambda k, t: D(m, k, pumped(M, layers, t), pol), kb.real, t1)
    Mc = conj(M)
    kz, tz = mp_root2(lambda k, t: D(m, k, pumped(Mc, layers, t), pol, 2), k * mp.mpf("1.0002"), -t * mp.mpf("0.98"))
    Ms = pumped(Mc, layers, tz)
    R = M["radii"][-1]
    ld = complex(k * (mp.hankel1(m - 1, k * R) / mp.hankel1(m, k * R) - m / (k * R)) if m else -k * mp.hankel1(1, k * R) / mp.hankel1(0, k * R))
    stp = dict(st, eps=[complex(e) for e in pumped(M, layers, t)["eps"]])
    chk = {"cpa_minus_conj_laser": max(abs(kz - k), abs(tz + t)), "abs_S_at_cpa": abs(S(m, kz, Ms, pol)),
           "ode_relative_difference_of_log_derivative": abs(ode_logder(m, k, stp, pol) / ld - 1),
           "absorbed_fraction_by_volume_integral_at_cpa": absorbed(m, kz, Ms, pol) if not st.get("core") else None}
    val = {"passive_pole": k0, "laser": {"k": k, "t": t}, "cpa_of_conjugate_structure": {"k": kz, "t": tz}}
    if any(mp.im(e) != 0 for e in M["eps"]):      # a lossy structure has its own CPA, not a conjugate
        try:
            ka, ta = mp_root2(lambda k, t: D(m, k, pumped(M, layers, t), pol, 2), kz, tz)
            val["cpa_of_this_structure"] = {"k": ka, "t": ta}
            chk["abs_S_at_cpa_of_this_structure"] = abs(S(m, ka, pumped(M, layers, ta), pol))
            chk["absorbed_fraction_this_structure"] = absorbed(m, ka, pumped(M, layers, ta), pol)
        except ArithmeticError as ex:
            chk["cpa_of_this_structure"] = "not found"
    return entry("layered/threshold/%s/%s/m%d/%s/k%s" % (name, pol, m, "+".join(map(str, layers)), kguess), "layered.py", "threshold",
                 dict(type="concentric layers", name=name, exterior="vacuum", **st), pol,
                 {"m": m, "pumped_layers": layers, "pump": "eps_j -> eps_j + i t, t real (t < 0 gain) in the pumped layers", "k_guess": kguess},
                 val, 14, "pole followed in the pump, then 2-real-unknown Newton at 40 digits; CPA from the H2 function", chk)


def do_S(c):
    name, st, pol = c
    mp.mp.dps = 30
    M = mpst(st)
    ks = [mp.mpf(j) / 4 for j in range(1, 21)]
    ms = list(range(0, 11))
    val = [[S(m, k, M, pol) for m in ms] for k in ks]
    if all(mp.im(e) == 0 for e in M["eps"]):
        chk = {"max_abs(|S|^2-1)": max(abs(abs(v) ** 2 - 1) for r in val for v in r)}
    else:
        chk = {"max_abs(1-|S|^2 - volume dissipation)": max(
            abs(1 - abs(val[i][m]) ** 2 - absorbed(m, ks[i], M, pol)) for i in (3, 12) for m in (0, 1, 4))}
    return entry("layered/S/%s/%s" % (name, pol), "layered.py", "S_m",
                 dict(type="concentric layers", name=name, exterior="vacuum", **st), pol, {},
                 {"k": ks, "m": ms, "S[k][m]": val}, 15, "closed form at 30 digits; S_{-m} = S_m", chk)
