"""Clusters of non-overlapping homogeneous circular cylinders in vacuum (multipole expansion).

Outside: u = u_inc + sum_j sum_n b_jn H_n(k r_j) e^{i n th_j}.  Graf's addition theorem carries
the waves of cylinder l to cylinder j; the interface conditions of cylinder j give, per order n,
   P_jn b_jn + N_jn sum_{l != j, m} H_{m-n}(k d_jl) e^{i(m-n) phi_jl} b_lm = -N_jn a_jn
with P = eta J'(nkR) H_n(kR) - J(nkR) H_n'(kR), N = eta J'(nkR) J_n(kR) - J(nkR) J_n'(kR),
eta = n (Ez), 1/n (Hz); phi_jl, d_jl: polar form of c_j - c_l.  Rows and columns are scaled by
constants evaluated at a reference k, so the matrix is analytic in k.
Poles: H = H1.  Zeros (CPA): H = H2 everywhere (only incoming waves outside).
Search: Beyn's contour method (double); then Newton on the bordered scalar
   [M b; c^T 0][v; f] = [0; 1],  f(k [, pump]) = 0,
first in double, then with M built by mpmath and the bordered solve done by iterative
refinement in multiprecision (the double LU is only the preconditioner).
S-matrix: multipole channels about the origin, field = sum_m (c_m H2_m + (S c)_m H1_m) e^{i m th},
valid outside the smallest circle about the origin that encloses the cluster.
"""
import numpy as np, mpmath as mp, scipy.linalg as la
from scipy import special as sp
from common import *

try:
    import gmpy2
except ImportError:
    gmpy2 = None
DPS = 32
if gmpy2:
    gmpy2.get_context().precision = int(DPS * 3.33) + 8


class Cluster:
    def __init__(s, pos, rad, eps, pol, N, kref, kind=1):
        s.pos = np.array(pos, float); s.rad = np.array(rad, float); s.eps = list(eps)
        s.pol, s.N, s.kind = pol, N, kind
        s.J = len(rad); s.n = np.arange(-N, N + 1); s.w = 2 * N + 1
        # constant scales
        s.kref = float(kref)
        s.col = np.array([[1 / abs(sp.hankel1(abs(n), s.kref * R)) for n in s.n] for R in s.rad])
        s.row = np.array([[1.0 / max(abs(sp.jv(abs(n), np.sqrt(complex(e).real if complex(e).real > 0 else 1) * s.kref * R)), 1e-280)
                           for n in s.n] for R, e in zip(s.rad, [abs(complex(e)) for e in s.eps])])

    def with_(s, eps=None, kind=None, N=None):
        c = Cluster(s.pos, s.rad, eps or s.eps, s.pol, N or s.N, s.kref, kind or s.kind)
        return c

    # ---- double precision
    def PN(s, k, eps):
        P = np.empty((s.J, s.w), complex); Q = np.empty((s.J, s.w), complex)
        a = np.arange(0, s.N + 1)
        hf, hpf = (sp.hankel1, sp.h1vp) if s.kind == 1 else (sp.hankel2, sp.h2vp)
        for j in range(s.J):
            n = np.sqrt(complex(eps[j])); R = s.rad[j]
            eta = n if s.pol == "Ez" else 1 / n
            j1, j1p = sp.jv(a, n * k * R), sp.jvp(a, n * k * R)
            p = eta * j1p * hf(a, k * R) - j1 * hpf(a, k * R)
            q = eta * j1p * sp.jv(a, k * R) - j1 * sp.jvp(a, k * R)
            for i, m in enumerate(s.n):
                P[j, i], Q[j, i] = p[abs(m)], q[abs(m)] * (1 if m >= 0 else (-1) ** abs(int(m)))
                if m < 0:
                    P[j, i] *= (-1) ** abs(int(m))
            # J_{-n} = (-1)^n J_n inside and out: both P, Q carry (-1)^n relative to the order-|n| functions
        return P, Q

    def mat(s, k, eps=None):
        eps = s.eps if eps is None else eps
        k = complex(k)
        P, Q = s.PN(k, eps)
        hf = sp.hankel1 if s.kind == 1 else sp.hankel2
        q = np.arange(-2 * s.N, 2 * s.N + 1)
        Mx = np.zeros((s.J * s.w, s.J * s.w), complex)
        dif = (s.n[None, :] - s.n[:, None])                     # m - n
        for j in range(s.J):
            sj = slice(j * s.w, (j + 1) * s.w)
            Mx[sj, sj] = np.diag(P[j] * s.row[j] * s.col[j])
            for l in range(s.J):
                if l == j:
                    continue
                d = s.pos[j] - s.pos[l]
                h = hf(np.abs(q), k * np.hypot(*d)) * np.where(q < 0, (-1.0) ** q, 1) * np.exp(1j * q * np.arctan2(d[1], d[0]))
                Mx[sj, l * s.w:(l + 1) * s.w] = (s.row[j] * Q[j])[:, None] * h[dif + 2 * s.N] * s.col[l][None, :]
        return Mx

    # ---- multiprecision (object matrices of gmpy2.mpc or mpmath.mpc)
    def mat_mp(s, k, eps):
        k = mp.mpmathify(k)
        hk = (lambda n, z: mp.hankel1(n, z)) if s.kind == 1 else (lambda n, z: mp.hankel2(n, z))
        cache = {}
        Mx = np.empty((s.J * s.w, s.J * s.w), object)
        zero = cv(mp.mpc(0)); Mx[:] = zero
        def hseq(z, n):
            h = [hk(0, z), hk(1, z)]
            for i in range(1, n):
                h.append(2 * i / z * h[-1] - h[-2])
            return h
        def jseq(z, n):                      # downward recurrence, normalised by J_0
            L = n + 30 + int(abs(z))
            a, b, out = mp.mpc(0), mp.mpf(10) ** -30, {}
            for i in range(L, 0, -1):
                a, b = b, 2 * i / z * b - a
                if i - 1 <= n + 1:
                    out[i - 1] = b
            sc = mp.besselj(0, z) / out[0] if abs(mp.besselj(0, z)) > 0.05 else mp.besselj(1, z) / out[1]
            return [out[i] * sc for i in range(n + 2)]
        der = lambda f, i: (f[i - 1] - f[i + 1]) / 2 if i else -f[1]
        N = s.N
        pq = {}
        for j in range(s.J):
            R = mp.mpf(s.rad[j]); key = (float(R), complex(eps[j]), str(eps[j]))
            if key not in pq:
                n = mp.sqrt(mp.mpmathify(eps[j])); eta = n if s.pol == "Ez" else 1 / n
                ji, jo, h = jseq(n * k * R, N + 1), jseq(k * R, N + 1), hseq(k * R, N + 2)
                pq[key] = [(eta * der(ji, i) * h[i] - ji[i] * der(h, i), eta * der(ji, i) * jo[i] - ji[i] * der(jo, i)) for i in range(N + 1)]
            P = pq[key]
            for i, m in enumerate(s.n):
                sg = 1 if m >= 0 else (-1) ** abs(int(m))
                Mx[j * s.w + i, j * s.w + i] = cv(P[abs(m)][0] * sg * mp.mpf(s.row[j, i]) * mp.mpf(s.col[j, i]))
        for j in range(s.J):
            R = mp.mpf(s.rad[j]); P = pq[(float(R), complex(eps[j]), str(eps[j]))]
            rw = np.array([cv(P[abs(m)][1] * (1 if m >= 0 else (-1) ** abs(int(m))) * mp.mpf(s.row[j, i])) for i, m in enumerate(s.n)], object)
            for l in range(s.J):
                if l == j:
                    continue
                dx, dy = mp.mpf(s.pos[j][0]) - mp.mpf(s.pos[l][0]), mp.mpf(s.pos[j][1]) - mp.mpf(s.pos[l][1])
                d2 = dx * dx + dy * dy
                kk = mp.nstr(d2, 25)
                if kk not in cache:
                    cache[kk] = hseq(k * mp.sqrt(d2), 2 * N + 1)
                h = cache[kk]; ph = mp.mpc(dx, dy) / mp.sqrt(d2)
                pw = [mp.mpc(1)]
                for _ in range(2 * N):
                    pw.append(pw[-1] * ph)
                t = {q: cv(h[q] * pw[q]) for q in range(2 * N + 1)}
                t.update({-q: cv((-1) ** q * h[q] * mp.conj(pw[q])) for q in range(1, 2 * N + 1)})
                cl = [cv(mp.mpc(s.col[l, i])) for i in range(s.w)]
                H = np.array([[t[int(m - n)] * cl[i] for i, m in enumerate(s.n)] for n in s.n], object)
                Mx[j * s.w:(j + 1) * s.w, l * s.w:(l + 1) * s.w] = rw[:, None] * H
        return Mx

    # ---- origin-basis maps (double)
    def AB(s, k, Mmax):
        """A: incoming J-coefficients about the origin -> local ones; B: local outgoing -> origin."""
        mm = np.arange(-Mmax, Mmax + 1)
        A = np.zeros((s.J * s.w, mm.size), complex); B = np.zeros((mm.size, s.J * s.w), complex)
        for j in range(s.J):
            r, ph = np.hypot(*s.pos[j]), np.arctan2(s.pos[j][1], s.pos[j][0])
            dif = mm[None, :] - s.n[:, None]
            A[j * s.w:(j + 1) * s.w] = sp.jv(dif, k * r) * np.exp(1j * dif * ph)
            B[:, j * s.w:(j + 1) * s.w] = (sp.jv(dif, k * r) * np.exp(-1j * dif * ph)).T
        return A, B

    def smatrix(s, k, Mmax, eps=None):
        eps = s.eps if eps is None else eps
        P, Q = s.PN(complex(k), eps)
        A, B = s.AB(k, Mmax)
        rhs = -(s.row * Q).ravel()[:, None] * A
        b = s.col.ravel()[:, None] * la.solve(s.mat(k, eps), rhs)
        return np.eye(2 * Mmax + 1) + 2 * B @ b


def cv(z):
    """mpmath complex -> gmpy2.mpc at the working precision (plain mpmath without gmpy2)."""
    if gmpy2 is None:
        return z
    z = mp.mpc(z)
    f = lambda t: gmpy2.mul_2exp(gmpy2.mpfr(-t[1] if t[0] else t[1]), t[2]) if t[2] >= 0 else \
        gmpy2.div_2exp(gmpy2.mpfr(-t[1] if t[0] else t[1]), -t[2])
    return gmpy2.mpc(f(z.real._mpf_), f(z.imag._mpf_))


def to_mp(z):
    if gmpy2 is None:
        return z
    f = lambda x: mp.mpf("{0:.45e}".format(x)) if x != 0 else mp.mpf(0)
    return mp.mpc(f(z.real), f(z.imag))


def beyn(c, centre, rx, ry, L=14, nq=64, tol=1e-7, eps=None):
    """Eigenvalues of c.mat(k) inside an ellipse (Beyn's first method with two moments)."""
    rng = np.random.default_rng(3)
    n = c.J * c.w
    V = rng.standard_normal((n, L)) + 1j * rng.standard_normal((n, L))
    A = [np.zeros((n, L), complex) for _ in range(4)]
    for q in range(nq):
        th = 2 * np.pi * (q + 0.5) / nq
        z = centre + rx * np.cos(th) + 1j * ry * np.sin(th)
        dz = (-rx * np.sin(th) + 1j * ry * np.cos(th)) / nq / 1j
        X = la.solve(c.mat(z, eps), V)
        for p in range(4):
            A[p] += X * (((z - centre) / rx) ** p) * dz
    B0 = np.block([[A[0], A[1]], [A[1], A[2]]]); B1 = np.block([[A[1], A[2]], [A[2], A[3]]])
    U, S, W = la.svd(B0, full_matrices=False)
    r = int(np.sum(S > tol * S[0]))
    lam = la.eigvals((U[:, :r].conj().T @ B1 @ W[:r].conj().T) / S[:r][None, :])
    k = centre + rx * lam
    out = []
    for z in k:
        if ((z.real - centre.real) / rx) ** 2 + ((z.imag - centre.imag) / ry) ** 2 < 1.3:
            z2 = newton1(c, z, eps)
            if z2 is not None and ((z2.real - centre.real) / rx) ** 2 + ((z2.imag - centre.imag) / ry) ** 2 < 1 \
                    and all(abs(z2 - y) > 1e-8 for y in out):
                out.append(z2)
    return sorted(out, key=lambda z: z.real), r


def det_count(c, centre, rx, ry, nq=160):
    """Argument principle on det M along the ellipse (phase from LU)."""
    ph = []
    for q in range(nq):
        th = 2 * np.pi * q / nq
        ph.append(np.linalg.slogdet(c.mat(centre + rx * np.cos(th) + 1j * ry * np.sin(th)))[0])
    ph = np.array(ph)
    d = np.angle(np.roll(ph, -1) / ph)
    return int(round(d.sum() / (2 * np.pi))), float(np.abs(d).max())


def borders(M):
    U, S, W = la.svd(M)
    return U[:, -1], W[-1], S


def bf(M, b, c):
    """f, and vectors v, u for derivatives of the bordered scalar."""
    n = M.shape[0]
    X = np.zeros((n + 1, n + 1), complex)
    X[:n, :n], X[:n, n], X[n, :n] = M, b, c
    lu = la.lu_factor(X)
    e = np.zeros(n + 1, complex); e[n] = 1
    v = la.lu_solve(lu, e); u = la.lu_solve(lu, e, trans=1)
    return v[n], v[:n], u[:n], lu


def newton1(c, k, eps=None, steps=30):
    k = complex(k)
    for it in range(steps):
        M = c.mat(k, eps)
        if it == 0 or it == 3:
            b, w, S = borders(M)
            w = w.conj()
        f, v, u, _ = bf(M, b, w)
        h = 1e-6
        fk = -u @ ((c.mat(k + h, eps) - c.mat(k - h, eps)) / (2 * h)) @ v
        d = f / fk
        if abs(d) > 0.05:
            d *= 0.05 / abs(d)
        k -= d
        if abs(d) < 3e-14 * abs(k):
            return k
    return k if abs(d) < 1e-11 else None


def pump_eps(c, pumped, t):
    return [e + (1j * t if j in pumped else 0) for j, e in enumerate(c.eps)]


def newton2(c, pumped, k, t, steps=40):
    k, t = float(k), float(t)
    for it in range(steps):
        E = lambda t: pump_eps(c, pumped, t)
        M = c.mat(k, E(t))
        if it % 4 == 0:
            b, w, S = borders(M); w = w.conj()
        f, v, u, _ = bf(M, b, w)
        h = 1e-6
        fk = -u @ ((c.mat(k + h, E(t)) - c.mat(k - h, E(t))) / (2 * h)) @ v
        ft = -u @ ((c.mat(k, E(t + h)) - c.mat(k, E(t - h))) / (2 * h)) @ v
        dk, dt = np.linalg.solve([[fk.real, ft.real], [fk.imag, ft.imag]], [f.real, f.imag])
        s = max(1, abs(dk) / 0.02, abs(dt) / (0.3 * abs(t) + 0.02))
        k, t = k - dk / s, t - dt / s
        if s == 1 and abs(dk) < 1e-13 * k and abs(dt) < 1e-12 * abs(t):
            break
    else:
        if s > 1 or abs(dk) > 1e-10:
            return None
    return k, t


def refine(c, k, pumped=None, t=None, iters=3):
    """Multiprecision Newton; returns (k[, t], last step)."""
    mp.mp.dps = DPS
    E = (lambda t: [mp.mpmathify(e) + (mp.mpc(0, 1) * t if j in pumped else 0) for j, e in enumerate(c.eps)]) if pumped is not None else (lambda t: c.eps)
    kd, td = (complex(k) if pumped is None else float(k)), (0.0 if t is None else float(t))
    Ed = (lambda t: pump_eps(c, pumped, t)) if pumped is not None else (lambda t: c.eps)
    M = c.mat(kd, Ed(td)); n = M.shape[0]
    b, w, S = borders(M); w = w.conj()
    f, v, u, lu = bf(M, b, w)
    h = 1e-6
    fk = -u @ ((c.mat(kd + h, Ed(td)) - c.mat(kd - h, Ed(td))) / (2 * h)) @ v
    if pumped is not None:
        ft = -u @ ((c.mat(kd, Ed(td + h)) - c.mat(kd, Ed(td - h))) / (2 * h)) @ v
    k, t = mp.mpmathify(kd), mp.mpf(td)
    bo = np.array([cv(mp.mpc(x)) for x in b], object); wo = np.array([cv(mp.mpc(x)) for x in w], object)
    step = None
    x = np.array([cv(mp.mpc(z)) for z in np.append(v, f)], object)
    for it in range(iters):
        X = c.mat_mp(k, E(t))
        for _ in range(3):                       # iterative refinement of the bordered solve
            r1 = -(X.dot(x[:n]) + bo * x[n])
            r2 = cv(mp.mpc(1)) - wo.dot(x[:n])
            r = np.array([complex(z) for z in np.append(r1, [r2])])
            sc = np.max(np.abs(r))
            if sc == 0 or sc < 10.0 ** (-DPS + 4):
                break
            d = la.lu_solve(lu, r / sc)
            x = x + np.array([cv(mp.mpc(z) * mp.mpf(sc)) for z in d], object)
        fm = to_mp(x[n])
        if pumped is None:
            dk = fm / mp.mpc(fk); k -= dk; step = abs(dk)
        else:
            det = fk.real * ft.imag - fk.imag * ft.real
            dk = (fm.real * ft.imag - fm.imag * ft.real) / mp.mpf(det)
            dt = (fk.real * fm.imag - fk.imag * fm.real) / mp.mpf(det)
            k -= dk; t -= dt; step = max(abs(dk), abs(dt))
        if step < mp.mpf(10) ** -20:
            break
    return (k, step) if pumped is None else (k, t, step)


def field(c, k, eps, b, pts):
    """Exterior field of outgoing (or incoming, kind 2) amplitudes b (unscaled) at pts."""
    hf = sp.hankel1 if c.kind == 1 else sp.hankel2
    out = []
    for x, y in pts:
        u = 0
        for j in range(c.J):
            dx, dy = x - c.pos[j][0], y - c.pos[j][1]
            r, th = np.hypot(dx, dy), np.arctan2(dy, dx)
            u += np.sum(b[j] * hf(np.abs(c.n), k * r) * np.where(c.n < 0, (-1.0) ** c.n, 1) * np.exp(1j * c.n * th))
        out.append(u)
    return np.array(out)


def nullvec(c, k, eps):
    U, S, W = la.svd(c.mat(k, eps))
    return (W[-1].conj() * c.col.ravel()).reshape(c.J, c.w), S[-1] / S[-2]


def boundary_check(c, k, eps=None):
    """Independent of Graf's theorem: sum the multipole fields of all cylinders directly on each
    circle (value and normal derivative), Fourier transform, and test the interface condition
    w_n J_n(nkR) = eta k J_n'(nkR) u_n.  Returns the largest residual relative to the largest u_n."""
    eps = c.eps if eps is None else eps
    k = complex(k)
    b, _ = nullvec(c, k, eps)
    hf = sp.hankel1 if c.kind == 1 else sp.hankel2
    ne = np.arange(-c.N - 1, c.N + 2)
    worst = 0
    th = 2 * np.pi * np.arange(256) / 256
    for j in range(c.J):
        X, Y = c.pos[j][0] + c.rad[j] * np.cos(th), c.pos[j][1] + c.rad[j] * np.sin(th)
        u = np.zeros(256, complex); ux = np.zeros(256, complex); uy = np.zeros(256, complex)
        for l in range(c.J):
            r, ph = np.hypot(X - c.pos[l][0], Y - c.pos[l][1]), np.arctan2(Y - c.pos[l][1], X - c.pos[l][0])
            W = hf(np.abs(ne)[:, None], k * r[None, :]) * np.where(ne < 0, (-1.0) ** ne, 1)[:, None] * np.exp(1j * ne[:, None] * ph[None, :])
            u += b[l] @ W[1:-1]
            up, dn = b[l] @ W[2:], b[l] @ W[:-2]
            ux += 0.5 * k * (dn - up); uy += 0.5j * k * (dn + up)
        w = ux * np.cos(th) + uy * np.sin(th)
        U, Wn = np.fft.fft(u) / 256, np.fft.fft(w) / 256
        n = np.sqrt(complex(eps[j])); eta = n if c.pol == "Ez" else 1 / n
        for m in range(-c.N + 6, c.N - 5):
            z = n * k * c.rad[j]
            worst = max(worst, abs(Wn[m] - eta * k * sp.jvp(abs(m), z) / sp.jv(abs(m), z) * U[m]) / np.abs(U).max())
    return worst


def parities(c, k, eps):
    b, _ = nullvec(c, k, eps)
    p = field(c, k, eps, b, [(2.9, 1.7), (-2.9, 1.7), (2.9, -1.7)])
    return {"u(-x,y)/u(x,y)": p[1] / p[0], "u(x,-y)/u(x,y)": p[2] / p[0]}


def geom(name, c, eps=None):
    return {"type": "circular cylinders in vacuum", "name": name,
            "cylinders": [{"x": p[0], "y": p[1], "radius": r, "eps": e} for p, r, e in zip(c.pos.tolist(), c.rad.tolist(), c.eps)]}


def mk(G, N=None, kind=1, eps=None):
    return Cluster(G["pos"], G["rad"], eps or G["eps"], G["pol"], N or G["N"], G["kref"], kind)


def do_poles(a):
    name, G, boxes = a
    c = mk(G)
    out, counts = [], []
    for centre, rx, ry in boxes:
        ks, rank = beyn(c, complex(centre), rx, ry, L=20)
        cnt, jump = det_count(c, complex(centre), rx, ry)
        if jump > 2:
            cnt, jump = det_count(c, complex(centre), rx, ry, 500)
        counts.append({"found": len(ks), "argument_principle": cnt, "largest_phase_step": jump})
        c2 = mk(G, N=G["N"] + 4)
        for z in ks:
            k, step = refine(c, z)
            z2 = newton1(c2, complex(k))
            out.append(dict(k=k, step=step, dN=abs(z2 - complex(k)) if z2 else None,
                            par=parities(c, complex(k), None) if G.get("sym") else None))
    chk = {"max_change_when_N_is_raised_by_4 (double)": max([o["dN"] for o in out] or [0]),
           "last_multiprecision_newton_step": max([o["step"] for o in out] or [0]), "contours (centre, rx, ry)": boxes,
           "counts": counts}
    # independent check: S-matrix zero of the conjugate problem at conj(k)
    cz = mk(G, kind=2, eps=[complex(e).conjugate() for e in G["eps"]])
    chk["zero_minus_conj_pole (H2 code, double)"] = max([abs(newton1(cz, complex(o["k"]).conjugate() * (1 + 1e-5)) - complex(o["k"]).conjugate()) for o in out[:3]] or [0])
    chk["interface condition by direct summation (no Graf), first pole"] = boundary_check(c, complex(out[0]["k"]))
    v = {"k": [o["k"] for o in out]}
    if G.get("sym"):
        v["parity"] = [o["par"] for o in out]
    return entry("cluster/poles/%s/%s" % (name, G["pol"]), "cluster.py", "poles", geom(name, c), G["pol"], {"N_multipoles": G["N"]},
                 v, digits_from(chk), "Graf multipoles, Beyn contour search, multiprecision bordered Newton (%d digits)" % DPS, chk)


def digits_from(chk):
    d = chk.get("max_change_when_N_is_raised_by_4 (double)", 1e-13)
    return int(max(6, min(15, np.floor(-np.log10(max(float(d), 3e-16))))))


def do_thr(a):
    name, G, pumped, kg, t0 = a
    c = mk(G)
    # follow the pole in the pump down to the real axis
    k0 = newton1(c, kg)
    t, k, path = 0.0, k0, [(0.0, k0)]
    dt = t0 / 8
    tt, kk = t0 / 8, k0
    for it in range(150):
        kn = newton1(c, kk, pump_eps(c, pumped, tt))
        if kn is None:
            break
        path.append((tt, kn))
        if abs(kn.imag) < 1e-3 * abs(k0.imag) or kn.imag > 0:
            break
        s = (path[-1][1].imag - path[-2][1].imag) / (path[-1][0] - path[-2][0])
        step = -kn.imag / s if s != 0 else dt
        lim = abs(t0) / 8
        if s > 0 or abs(step) > lim:                  # pump has to raise Im k as t decreases
            step = -lim
        kk, tt = kn, tt + step
        if abs(tt) > 6 * abs(t0):
            break
    kn, tt = path[-1][1], path[-1][0]
    followed = abs(kn.imag) < 1e-3 * abs(k0.imag) or kn.imag > 0
    r = newton2(c, pumped, kn.real, tt) if followed else newton2(c, pumped, k0.real, t0)
    if r is not None and not -6 < r[1] < 0:
        r = None
    if r is None:
        return None
    k, t, step = refine(c, r[0], pumped, r[1])
    c2 = mk(G, N=G["N"] + 4)
    r2 = newton2(c2, pumped, float(k), float(t))
    chk = {"max_change_when_N_is_raised_by_4 (double)": max(abs(r2[0] - float(k)), abs(r2[1] - float(t))),
           "last_multiprecision_newton_step": step}
    chk["interface condition by direct summation (no Graf) at threshold"] = boundary_check(c, float(k), pump_eps(c, pumped, float(t)))
    val = {"passive_pole": k0, "threshold_continuously_connected_to_passive_pole": bool(followed), "laser": {"k": k, "t": t}}
    # CPA of the time-reversed structure and, if the passive part is lossy, of the structure itself
    lossless = all(complex(e).imag == 0 for e in G["eps"])
    cc = mk(G, kind=2, eps=[complex(e).conjugate() for e in G["eps"]])
    z = newton2(cc, pumped, float(k) * 1.00001, -float(t) * 0.999)
    chk["cpa_minus_conj_laser (double)"] = max(abs(z[0] - float(k)), abs(z[1] + float(t)))
    eps_c = [complex(e).conjugate() + (1j * -float(t) if j in pumped else 0) for j, e in enumerate(G["eps"])]
    kc = float(k)
    key = "cpa" if lossless else "cpa_of_conjugate_structure"
    val[key] = {"k": k, "t": -t}
    tags = [(key, eps_c, kc, cc)]
    if not lossless:
        own = mk(G, kind=2)
        # zero of the passive lossy structure followed up in added loss
        zr = newton2(own, pumped, float(k), -float(t) * 0.8)
        if zr and zr[1] > -5:
            ko, to, st = refine(own, zr[0], pumped, zr[1])
            val["cpa"] = {"k": ko, "t": to}
            tags.append(("cpa", [complex(e) + (1j * float(to) if j in pumped else 0) for j, e in enumerate(G["eps"])], float(ko), own))
    Mmax = int(np.ceil(kc * max(np.hypot(*p) + r for p, r in zip(c.pos, c.rad)))) + 14
    for tag, ep, kk, co in tags:
        b, gap = nullvec(co, kk, ep)
        A, B = co.AB(kk, Mmax)
        wf = B @ b.ravel()
        i0 = np.argmax(np.abs(wf)); wf = wf / np.linalg.norm(wf) * np.exp(-1j * np.angle(wf[i0]))
        co1 = Cluster(c.pos, c.rad, ep, c.pol, c.N, c.kref, 1)
        S = co1.smatrix(kk, Mmax)
        chk["norm(S c) at " + tag] = np.linalg.norm(S @ wf)
        sv = la.svdvals(S)
        val[tag]["incoming_c_m (m, re, im), unit norm, largest real positive"] = [[int(m), x.real, x.imag] for m, x in zip(range(-Mmax, Mmax + 1), wf) if abs(x) > 1e-15]
        val[tag]["two_smallest_singular_values_of_S"] = [sv[-1], sv[-2]]
    return entry("cluster/threshold/%s/%s/%s/k%.3f" % (name, G["pol"], "+".join(map(str, pumped)), kg.real), "cluster.py", "threshold", geom(name, c), G["pol"],
                 {"N_multipoles": G["N"], "pumped_cylinders (0-based)": pumped, "pump": "eps_j -> eps_j + i t on the pumped cylinders, t real"},
                 val, digits_from(chk), "pole followed in t, double Newton, multiprecision Newton (%d digits); wavefront in double (12 digits)" % DPS, chk)


def do_S(a):
    name, G, ks, eps_over = a
    c = mk(G, eps=eps_over)
    Mmax = int(np.ceil(max(ks) * max(np.hypot(*p) + r for p, r in zip(c.pos, c.rad)))) + 10
    keep = int(np.ceil(max(ks) * max(np.hypot(*p) + r for p, r in zip(c.pos, c.rad)))) + 2
    out, un, rec, dN, neg = [], 0, 0, 0, None
    for k in ks:
        c = mk(dict(G, kref=k), eps=eps_over)              # scale at the k of interest
        c2 = mk(dict(G, kref=k), N=G["N"] + 4, eps=eps_over)
        S = c.smatrix(k, Mmax)
        dN = max(dN, np.abs(S - c2.smatrix(k, Mmax)).max())
        un = max(un, la.norm(S.conj().T @ S - np.eye(2 * Mmax + 1), 2))
        m = np.arange(-Mmax, Mmax + 1)
        # reciprocity: S_{mn} (-1)^m = S_{-n,-m} (-1)^n
        sg = (-1.0) ** (m[:, None] - m[None, :])
        rec = max(rec, np.abs(S - sg * S[::-1, ::-1].T).max())
        a = slice(Mmax - keep, Mmax + keep + 1)
        pw = (1j) ** (m % 4) / 2                              # plane wave exp(ikx): c_m = i^m/2
        T = (S - np.eye(2 * Mmax + 1)) @ pw
        csca = 4 / k * np.sum(np.abs(T) ** 2); cext = -4 / k * np.real(np.sum(T * np.conj(pw))) * 2
        out.append({"k": k, "S (rows out m=-M..M, cols in)": S[a, a].tolist(), "eigen_absorption (1 - singular values^2), largest 4": sorted((1 - la.svdvals(S) ** 2).tolist())[::-1][:4],
                    "plane_wave_along_x": {"scattering_width": csca, "extinction_width": cext}})
    lossless = all(complex(e).imag == 0 for e in c.eps)
    chk = {"norm(S^H S - 1)": un, "lossless": lossless, "reciprocity": rec, "max_change_when_N_is_raised_by_4 (double)": dN}
    return entry("cluster/S/%s/%s/%s" % (name, G["pol"], "eps_changed" if eps_over else "base"), "cluster.py", "S matrix", geom(name, c), G["pol"],
                 {"N_multipoles": G["N"], "Mmax_printed": keep, "Mmax_used": Mmax}, {"k_points": out}, min(12, digits_from(chk)),
                 "Graf multipoles, double precision", chk)
