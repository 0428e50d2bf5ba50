"""What the reference programs have in common.

Conventions used everywhere: time dependence exp(-i w t); outgoing wave = H^(1);
poles of a passive lossless body have Im k < 0, zeros Im k > 0; loss is Im eps > 0.
Polarisation "Ez": u and du/dn continuous; "Hz": u and (1/eps) du/dn continuous.
Complex numbers are written in JSON as [re, im]; numbers carry 17 significant digits
(IEEE double), of which `digits` are believed.
"""
import numpy as np
import mpmath as mp

CONVENTIONS = {
    "time": "exp(-i w t)", "outgoing": "H^(1)", "k": "vacuum wavenumber",
    "loss": "Im eps > 0", "gain": "Im eps < 0",
    "Ez": "u and du/dn continuous", "Hz": "u and (1/eps) du/dn continuous",
    "complex": "[re, im]"}


def num(x):
    """JSON-able version of a number / container (complex -> [re, im])."""
    if isinstance(x, dict):
        return {str(k): num(v) for k, v in x.items()}
    if isinstance(x, (list, tuple, np.ndarray)):
        return [num(v) for v in x]
    if isinstance(x, (bool, np.bool_)):
        return bool(x)
    if isinstance(x, (int, np.integer, str)) or x is None:
        return x if not isinstance(x, np.integer) else int(x)
    if isinstance(x, (float, np.floating)):
        return float(x)
    if isinstance(x, mp.mpf):
        return float(mp.nstr(x, 20))
    if isinstance(x, (complex, np.complexfloating)):
        return [float(x.real), float(x.imag)]
    if isinstance(x, mp.mpc):
        return [num(x.real), num(x.imag)]
    raise TypeError(type(x))


def entry(id, program, kind, geometry, pol, parameters, values, digits, method, checks):
    return num(dict(id=id, program=program, kind=kind, geometry=geometry, polarisation=pol,
                    parameters=parameters, values=values, digits=digits, method=method,
                    checks=checks))


# ---------------------------------------------------------------- root finding (double)
def newton_grid(f, re0, re1, im0, im1, nre, nim, iters=40, tol=1e-8):
    """Roots of the vectorised analytic function f in a rectangle, by Newton's method
    from a grid of starts (central-difference derivative)."""
    a, b = np.meshgrid(np.linspace(re0, re1, nre), np.linspace(im0, im1, nim))
    z = (a + 1j * b).ravel()
    h, good = 1e-6, []
    with np.errstate(all="ignore"):
        for _ in range(iters):
            fz = f(z)
            s = fz * h / (f(z + h) - fz)
            m = np.abs(s)
            fin = np.isfinite(m)
            s = np.where(m > 0.1, s / np.maximum(m, 1e-300) * 0.1, s)
            z = z - s
            done = fin & (m < tol)
            good += list(z[done])
            keep = fin & ~done & (z.real > re0 - 0.15) & (z.real < re1 + 0.15) & (z.imag > im0 - 0.3) & (z.imag < im1 + 0.3)
            z = z[keep]
            if z.size == 0:
                break
    z = np.array(good, complex)
    ok = (z.real > re0) & (z.real < re1) & (z.imag > im0) & (z.imag < im1) if z.size else np.zeros(0, bool)
    out = []
    for w in sorted(z[ok], key=lambda w: (round(w.real, 7), w.imag)):
        if all(abs(w - v) > 1e-7 for v in out):
            out.append(complex(w))
    return out


def winding(f, re0, re1, im0, im1, n=800):
    """Number of zeros of the analytic f in the rectangle, by the argument principle."""
    t = np.linspace(0, 1, n + 1)
    p = np.concatenate([re0 + (re1 - re0) * t + 1j * im0, re1 + 1j * (im0 + (im1 - im0) * t),
                        re1 + (re0 - re1) * t + 1j * im1, re0 + 1j * (im1 + (im0 - im1) * t)])
    v = f(p)
    d = np.angle(v[1:] / v[:-1])
    if np.max(np.abs(d)) > 1.5 and n < 60000:
        return winding(f, re0, re1, im0, im1, 4 * n)
    return int(round(d.sum() / (2 * np.pi))), float(np.max(np.abs(d)))


# ---------------------------------------------------------------- root finding (mpmath)
def mp_root(f, z0, tol=None):
    """Complex secant in mpmath from an accurate double start."""
    tol = tol or mp.mpf(10) ** (-(mp.mp.dps - 8))
    a = mp.mpmathify(z0)
    b = a * (1 + mp.mpf(10) ** (-9))
    fa, fb = f(a), f(b)
    for _ in range(60):
        if fb == fa:
            break
        c = b - fb * (b - a) / (fb - fa)
        a, fa, b = b, fb, c
        if abs(b - a) < tol * abs(b):
            return b
        fb = f(b)
    if abs(b - a) < 1e4 * tol * abs(b):
        return b
    raise ArithmeticError("no convergence from %s" % z0)


def mp_root2(f, x0, y0, steps=40):
    """Real (x, y) with complex f(x, y) = 0 (Newton, f analytic in each, real steps)."""
    x, y = mp.mpf(x0), mp.mpf(y0)
    h = mp.mpf(10) ** (-(mp.mp.dps // 3))
    for it in range(steps):
        f0 = f(x, y)
        fx = (f(x + h, y) - f(x - h, y)) / (2 * h)
        fy = (f(x, y + h) - f(x, y - h)) / (2 * h)
        det = fx.real * fy.imag - fx.imag * fy.real
        dx = (-f0.real * fy.imag + f0.imag * fy.real) / det
        dy = (-fx.real * f0.imag + fx.imag * f0.real) / det
        s = max(abs(dx) / 0.1, abs(dy) / (0.5 * abs(y) + mp.mpf("0.02")), 1)
        x, y = x + dx / s, y + dy / s
        if s == 1 and abs(dx) < mp.mpf(10) ** (-(mp.mp.dps - 10)) * abs(x) and \
                abs(dy) < mp.mpf(10) ** (-(mp.mp.dps - 10)) * (abs(y) + mp.mpf(10) ** -12):
            return x, y
    raise ArithmeticError("no convergence (k, pump) from %s %s" % (x0, y0))
