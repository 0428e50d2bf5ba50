"""Makes cylinder-functions.json: J_m, H1_m, H2_m and their derivatives at complex z by mpmath, 200 digits checked against 130.

Each value is [re, im, e]: (re + i im) * 2**e with re, im rounded to doubles.
"""
import json
import random
import mpmath as mp

mp.mp.dps = 60
rng = random.Random(20240607)


def pack(v):
    size = max(abs(v.real), abs(v.imag))
    e = int(mp.floor(mp.log(size, 2))) if size else 0
    s = mp.mpf(2) ** -e
    return [float(v.real * s), float(v.imag * s), e]


def sequence(f, n, z):
    """Orders 0..n of a Hankel function: mpmath for 0 and 1, then C_{m+1} = (2m/z) C_m - C_{m-1}."""
    c = [f(0, z), f(1, z)]
    for m in range(1, n):
        c.append(2 * m / z * c[m] - c[m - 1])
    return c


def values(m, z, digits):
    """[J, J', H1, H1', H2, H2'] of order m. The recurrence may lose e^(2 |Im z|) ~ 1e52: hence many digits."""
    with mp.workdps(digits):
        out = []
        J = [mp.besselj(n, z) for n in (m - 1, m, m + 1)]
        out += [J[1], (J[0] - J[2]) / 2]
        for f in (mp.hankel1, mp.hankel2):
            c = sequence(f, m + 1, z)
            out += [c[m], -c[1] if m == 0 else (c[m - 1] - c[m + 1]) / 2]
        return out


rows = []


def row(m, x, y):
    z = mp.mpc(x, y)
    low, high = values(m, z, 130), values(m, z, 200)
    for u, v in zip(low, high):
        assert abs(u - v) < abs(v) * mp.mpf(10) ** -30, (m, z)
    names = ('J', 'dJ', 'H1', 'dH1', 'H2', 'dH2')
    rows.append({'m': m, 're': x, 'im': y, **dict(zip(names, map(pack, high)))})


for m, x, y in [
    (0, 1.0, 0.0), (1, 1.0, -0.1), (0, 2.0, 0.0), (0, 1.999, 0.0), (3, 1.4, 1.4), (0, 0.001, 1.999), (0, 0.001, 2.001),
    (0, 1e-3, 0.0), (400, 0.5, -0.05), (400, 3.0, -1.0), (600, 1e-3, -1e-4), (250, 200.0, 0.0), (200, 200.0, 0.0),
    (0, 200.0, 0.0), (100, 200.0, 0.0), (0, 190.0, -60.0), (150, 190.0, -60.0), (0, 190.0, 60.0), (120, 10.0, -60.0),
    (60, 10.0, -60.0), (20, 0.5, -60.0), (1, 0.1, 60.0), (300, 150.0, 30.0), (300, 150.0, -30.0), (5, 1e-8, 0.0),
]:
    row(m, x, y)
for _ in range(80):
    r = 10 ** rng.uniform(-2, 2.3)
    y = rng.uniform(-1, 1) * min(r * 0.98, 60) * (1 if rng.random() < 0.7 else 0.01)
    x = (r * r - y * y) ** 0.5
    m = int(rng.uniform(0, 1.6) * r) if rng.random() < 0.6 else rng.randrange(0, 300)
    row(m, round(x, 6) or 1e-6, round(y, 6))

with open('cylinder-functions.json', 'w') as out:
    out.write('[\n' + ',\n'.join(json.dumps(r) for r in rows) + '\n]\n')
