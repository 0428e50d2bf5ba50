"""Makes gauss-rules.json: positive half of Gauss-Legendre rules and whole Gauss-Lobatto, Gauss-Jacobi rules, mpmath 60 digits."""
import json
import mpmath as mp

mp.mp.dps = 60


def derivative(n, a, b, x):
    return mp.mpf(n + a + b + 1) / 2 * mp.jacobi(n - 1, a + 1, b + 1, x, zeroprec=1000)


def zeros(n, a, b):
    """Zeros of P_n^(a,b): eigenvalues of the Jacobi matrix (Golub-Welsch), polished by Newton."""
    a, b = mp.mpf(a), mp.mpf(b)
    M = mp.zeros(n)
    for k in range(n):
        s = 2 * k + a + b
        M[k, k] = (b - a) / (a + b + 2) if k == 0 else (b * b - a * a) / (s * (s + 2))
        if k:
            if k == 1:
                q = 4 * (1 + a) * (1 + b) / ((2 + a + b) ** 2 * (3 + a + b))
            else:
                q = 4 * k * (k + a) * (k + b) * (k + a + b) / (s * s * (s + 1) * (s - 1))
            M[k, k - 1] = M[k - 1, k] = mp.sqrt(q)
    out = sorted(mp.eigsy(M, eigvals_only=True))
    for _ in range(2):
        out = [x - mp.jacobi(n, a, b, x, zeroprec=1000) / derivative(n, a, b, x) for x in out]
    return out


def jacobi_rule(n, a, b):
    a, b = mp.mpf(a), mp.mpf(b)
    x = zeros(n, a, b)
    c = 2 ** (a + b + 1) * mp.gamma(n + a + 1) * mp.gamma(n + b + 1) / (mp.factorial(n) * mp.gamma(n + a + b + 1))
    return x, [c / ((1 - t * t) * derivative(n, a, b, t) ** 2) for t in x]


def lobatto_rule(n):
    x = [mp.mpf(-1)] + (zeros(n - 2, 1, 1) if n > 2 else []) + [mp.mpf(1)]
    return x, [2 / (n * (n - 1) * mp.legendre(n - 1, t, zeroprec=1000) ** 2) for t in x]


rules = []
for n in (1, 2, 3, 5, 8, 13, 20, 31, 64):
    rules.append(('legendre', n, 0, 0, *jacobi_rule(n, 0, 0)))
for n in (2, 3, 4, 7, 12, 21):
    rules.append(('lobatto', n, 0, 0, *lobatto_rule(n)))
for n, a, b in ((1, 1, 0), (4, 1, 0), (16, 1, 0), (31, 1, 0), (9, 2, 3), (12, -0.5, 0.5), (7, 0.25, 1.75)):
    rules.append(('jacobi', n, a, b, *jacobi_rule(n, a, b)))
with open('gauss-rules.json', 'w') as out:
    out.write('[\n' + ',\n'.join(json.dumps({
        'rule': r, 'n': n, 'a': a, 'b': b, 'nodes': [float(v) for v in x], 'weights': [float(v) for v in w],
    }) for r, n, a, b, x, w in rules) + '\n]\n')
