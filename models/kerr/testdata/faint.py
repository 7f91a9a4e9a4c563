#!/usr/bin/env python3
"""Reflection and transmission of the Kerr barrier at 60 digits, for faint.csv.

    python3 faint.py > faint.csv        (needs mpmath; seven minutes, three with gmpy2)

G = c = M = 1, spin weight -2, fields exp(-i omega t + i m phi). Nothing of the Go package is used and the
variables differ from its own: the radial equation of ApJ 185, 635 (1973) is solved as it stands,

    D^2 R'' + 2 (s+1)(r-1) D R' + (K^2 - 2 i s (r-1) K + (4 i s omega r - lam) D) R = 0,   s = -2,

D = r^2 - 2r + a^2, K = (r^2+a^2) omega - a m, lam = A + a^2 omega^2 - 2 a m omega, from the series in 1/r of the
outgoing wave, exp(i omega (r + 2 ln(r/2))) r^3 (1 + ...), through Taylor series along the real axis to the two
Frobenius series at the horizon, normalised as exp(ikr*) and D^2 exp(-ikr*). The separation constant A is the root of
the continued fraction of Proc. R. Soc. A 402, 285 (1985), eqs. 20-21. At 60 digits the smallest reflection here
(1e-15) keeps 40. Column flux is | |R|^2 + (omega/k)|T|^2 - 1 |, which ties both amplitudes together.
"""
from mpmath import mp, mpf, mpc, exp, log, sqrt, findroot, nstr
import random

mp.dps = 60
S = -2


def separation(l, m, c):
    """A of spin weight S at real c = a omega, followed from c = 0."""
    k1, k2 = mpf(abs(m - S)) / 2, mpf(abs(m + S)) / 2
    invert = l - max(abs(m), abs(S))

    def fraction(a):
        al = lambda n: -2 * (n + 1) * (n + 2 * k1 + 1)
        be = lambda n: n * (n - 1) + 2 * n * (k1 + k2 + 1 - 2 * c) - (2 * c * (2 * k1 + S + 1) - (k1 + k2) * (k1 + k2 + 1)) - (c * c + S * (S + 1) + a)
        ga = lambda n: 2 * c * (n + k1 + k2 + S)
        up = mpf(0)
        for n in range(1, invert + 1):
            up = al(n - 1) * ga(n) / (be(n - 1) - up)
        down = mpf(0)
        for n in range(invert + 90, invert, -1):
            down = al(n - 1) * ga(n) / (be(n) - down)
        return be(invert) - up - down

    target = c
    steps = 1 + int(abs(target) * 20)
    old = [mpf(l * (l + 1) - S * (S + 1))]
    if target == 0:
        return old[0]
    for i in range(1, steps + 1):
        c = target * i / steps
        guess = old[-1] if len(old) == 1 else 2 * old[-1] - old[-2]
        root = findroot(fraction, (guess, guess + mpf(10) ** -4), solver='secant', tol=mpf(10) ** (-100 if i == steps else -30), verify=False)
        old.append(root)
    return old[-1]


def polynomial_coefficients(a, m, w, lam, r0):
    """Coefficients in y = r - r0 of D^2, 2(s+1)(r-1)D and of the factor of R."""
    def mul(p, q):
        out = [mpc(0)] * (len(p) + len(q) - 1)
        for i, x in enumerate(p):
            for j, y in enumerate(q):
                out[i + j] += x * y
        return out

    def add(*ps):
        out = [mpc(0)] * max(len(p) for p in ps)
        for p in ps:
            for i, x in enumerate(p):
                out[i] += x
        return out

    delta = [r0 * r0 - 2 * r0 + a * a, 2 * r0 - 2, mpf(1)]
    k = [(r0 * r0 + a * a) * w - a * m, 2 * r0 * w, w]
    r1 = [r0 - 1, mpf(1)]
    two = mul(delta, delta)
    one = [2 * (S + 1) * x for x in mul(r1, delta)]
    zero = add(mul(k, k), [-2j * S * x for x in mul(r1, k)], mul([4j * S * w * r0 - lam, 4j * S * w], delta))
    return two, one, zero


def taylor(a, m, w, lam, r0, h, value, slope):
    two, one, zero = polynomial_coefficients(a, m, w, lam, r0)
    c = [value, slope]
    total, dtotal = value + slope * h, slope
    power, small = h, mpf(10) ** (-mp.dps - 5)
    quiet = 0
    for n in range(0, 2000):
        # coefficient of y^n
        acc = mpc(0)
        for j in range(1, 5):
            if n - j >= 0:
                acc += two[j] * c[n - j + 2] * (n - j + 2) * (n - j + 1)
        for j in range(0, 4):
            if n - j >= 0:
                acc += one[j] * c[n - j + 1] * (n - j + 1)
        for j in range(0, 5):
            if n - j >= 0:
                acc += zero[j] * c[n - j]
        nxt = -acc / (two[0] * (n + 2) * (n + 1))
        c.append(nxt)
        dterm = nxt * (n + 2) * power
        dtotal += dterm
        power *= h
        total += nxt * power
        quiet = quiet + 1 if abs(dterm) < small * abs(dtotal) else 0
        if quiet > 3:
            return total, dtotal
    raise ValueError('no convergence')


def far(a, m, w, lam, r):
    """Outgoing solution and slope at large r, R = e^{i w r} r^p sum a_n r^-n, p = -1-2s+2iw, by the equation's powers."""
    # In powers of r: D^2 = r^4 - 4r^3 + (4+2a^2) r^2 - 4a^2 r + a^4, and so on.
    two, one, zero = polynomial_coefficients(a, m, w, lam, mpf(0))
    iw, p = 1j * w, -1 - 2 * S + 2j * w
    # With f = sum a_n r^{q_n}, q_n = p-n: R'' -> (iw)^2 + 2 iw q/r + q(q-1)/r^2, R' -> iw + q/r.
    coefficients = [mpc(1)]
    total, dtotal = mpc(1), iw + p / r

    def weight(j, q):
        """Factor of r^{q+4-j} that a term r^q yields."""
        def at(poly, i):
            return poly[i] if 0 <= i < len(poly) else 0
        v = at(two, 4 - j) * iw * iw + at(two, 5 - j) * 2 * iw * q + at(two, 6 - j) * q * (q - 1)
        v += at(one, 4 - j) * iw + at(one, 5 - j) * q
        return v + at(zero, 4 - j)

    small = mpf(10) ** (-mp.dps - 2)
    assert abs(weight(0, p)) < small * 100 and abs(weight(1, p)) < small * 1000
    power, quiet, last = mpf(1), 0, mpf(1)
    for n in range(1, 400):
        # the power r^{p+3-n}: term n enters with weight 1
        acc = mpc(0)
        for i in range(max(0, n - 6), n):
            acc += coefficients[i] * weight(n + 1 - i, p - i)
        cn = -acc / weight(1, p - n)
        coefficients.append(cn)
        power /= r
        term = cn * power
        total += term
        dtotal += term * (iw + (p - n) / r)
        quiet = quiet + 1 if abs(term) < small else 0
        if quiet > 3:
            front = exp(1j * w * (r + 2 * log(r / 2))) * r ** (-1 - 2 * S)
            return front * total, front * dtotal
    raise ValueError('far series did not converge')


def horizon(a, m, w, lam, rp, d, rho, x):
    """Frobenius solution x^rho (1 + ...), x = (r-r+)/d, and its slope in x, without the factor x^rho."""
    two, one, zero = polynomial_coefficients(a, m, w, lam, rp)
    # y = d x: divide the equation by d^2 y^2... coefficients of x: two has y^2 lowest, one y^1, zero y^0.
    t = [two[j] * d ** (j - 2) for j in range(2, 5)]
    o = [one[j] * d ** (j - 1) for j in range(1, 4)]
    z = [zero[j] * d ** j for j in range(0, 5)]
    # indicial: t0 q(q-1) + o0 q + z0 with y-powers: D^2 R'' -> d^2.. all scaled alike
    def ind(j, q):
        v = t[j] * q * (q - 1) if j < len(t) else 0
        v += o[j] * q if j < len(o) else 0
        return v + (z[j] if j < len(z) else 0)
    assert abs(ind(0, rho)) < mpf(10) ** (-mp.dps + 10)
    c = [mpc(1)]
    total, dtotal, power = mpc(1), rho / x, mpf(1)
    small, quiet = mpf(10) ** (-mp.dps - 5), 0
    for n in range(1, 2000):
        acc = mpc(0)
        for j in range(1, min(n, 4) + 1):
            acc += c[n - j] * ind(j, rho + n - j)
        cn = -acc / ind(0, rho + n)
        c.append(cn)
        power *= x
        total += cn * power
        dtotal += cn * power * (rho + n) / x
        quiet = quiet + 1 if abs(cn * power) * n < small else 0
        if quiet > 3:
            return total, dtotal
    raise ValueError('horizon series did not converge')


def respond(l, m, a, w):
    a, w = mpf(a), mpf(w)
    A = separation(l, m, a * w)
    lam = A + a * a * w * w - 2 * a * m * w
    root = sqrt(1 - a * a)
    rp, rm, d = 1 + root, 1 - root, 2 * root
    k = w - m * a / (2 * rp)
    kh = 2 * rp * k / d
    z = 100 / w + 80
    value, slope = far(a, m, w, lam, rp + z)
    end = mpf('0.4') * d
    while z > end:
        step = min(z / 3, 6 / w)
        nxt = max(end, z - step)
        value, slope = taylor(a, m, w, lam, rp + z, nxt - z, value, slope)
        z = nxt
    x = mpf('0.4')
    slope *= d
    # exp(ikr*) = exp(ik r0) x^{i kh} (1 + ...): r* at the horizon is r+ + 2r+/d ln(d x/2) - 2r-/d ln(d/2).
    phase = exp(1j * k * (rp + 2 * rp / d * log(d / 2) - 2 * rm / d * log(d / 2)))
    f, df = horizon(a, m, w, lam, rp, d, 1j * kh, x)
    g, dg = horizon(a, m, w, lam, rp, d, 2 - 1j * kh, x)
    fo = phase * x ** (1j * kh)
    # D^2 exp(-ikr*) = d^4 x^2 ... : normalise the ingoing series to it
    fi = d ** 4 / phase * x ** (2 - 1j * kh)
    f, df, g, dg = f * fo, df * fo, g * fi, dg * fi
    wr = f * dg - df * g
    out = (value * dg - slope * g) / wr
    back = (f * slope - df * value) / wr
    q, t = back / out, 1 / out
    maw, aw2 = m * a * w, a * a * w * w
    c2 = ((lam + 2) ** 2 + 4 * maw - 4 * aw2) * (lam ** 2 + 36 * maw - 36 * aw2) + (2 * lam + 3) * (96 * aw2 - 48 * maw) + 144 * w * w * (1 - a * a)
    odd = sqrt(c2 - 144 * w * w) - 12j * w
    one = 1 - 2j * kh
    R = d ** 4 * (-4j * kh) * (1 - 1j * kh) * one * one * q / odd
    T = d * d * 1j * kh * one * t / (2 * w * w * sqrt(2 * rp))
    flux = abs(abs(R) ** 2 + w / k * abs(T) ** 2 - 1)
    return A, R, T, w / k * abs(T) ** 2, flux


def points():
    """Corners by hand, then a spread of the whole domain, then the edges; a string is exact as printed."""
    spins, omegas = ['0', '0.7', '0.998'], ['0.7', '2']
    for l in (2, 3, 4):
        for m in sorted({-l, -1, 1, l}):
            for a in spins:
                for w in omegas:
                    if a != '0' or m == l:
                        yield l, m, a, w
    rng = random.Random(3)
    for _ in range(100):
        l = rng.choice((2, 2, 3, 3, 4, 4, 8))
        m = rng.randint(-l, l)
        a = '%.4f' % min(0.998, 1 - 10 ** rng.uniform(-2.7, 0))
        w = '%.4g' % (10 ** rng.uniform(-3, 0.301) if rng.random() < 0.5 else rng.uniform(0.05, 2))
        yield l, m, a, w
    for l, m, a, w in ((4, 4, '0.998', '3'), (4, -4, '0.998', '3'), (2, 2, '0', '3'), (3, 3, '0.95', '2.5'), (8, 8, '0.998', '3'), (8, -8, '0.998', '3')):
        yield l, m, a, w
    # Beside the edge of the superradiant band and at low frequency. There the printed digits are those of a double, whose
    # exact value is what is computed: k is a small difference.
    rng = random.Random(9)
    for i in range(36):
        l = rng.choice((2, 3, 4))
        m = rng.randint(1, l)
        a = float('%.4f' % min(0.998, 1 - 10 ** rng.uniform(-2.7, 0)))
        e = 10 ** rng.uniform(-10, -1) * rng.choice((1, -1))
        w = float(m * a / (2 * (1 + (1 - a * a) ** .5)) * (1 + e))
        if i % 3 == 0:
            m = rng.choice((-l, 0, l))
            w = float('%.3g' % (10 ** rng.uniform(-3, -2)))
        yield l, m, a, w


if __name__ == '__main__':
    print('# Reflection and transmission of the Kerr barrier for waves from the horizon side, spin weight -2, G = c = M = 1, odd')
    print('# parity; many with |R| far below 1. Computed independently of this package at 60 digits by faint.py beside this file.')
    print('l,m,a,omega,A,re_R_odd,im_R_odd,re_T,im_T,greybody,flux')
    for l, m, a, w in points():
        A, R, T, grey, flux = respond(l, m, a, w)
        n = lambda v: nstr(v, 20)
        print(','.join([str(l), str(m), str(a), str(w), n(A), n(R.real), n(R.imag), n(T.real), n(T.imag), n(grey), nstr(flux, 3)]), flush=True)
