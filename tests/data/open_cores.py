"""Field solution of a cylinder of constant susceptibility inside a thin coaxial coil, by surface charges.

Rings of charge on panels graded towards the edge; sigma (1/chi + 1/2) - PV(normal field of sigma) = normal field of the
coil. The coil of radius b and length w with 1 A/m is a cylinder of magnetization 1 A/m: its field is that of its end
faces' charges, plus 1 A/m inside. Its extra linkage by the cylinder is -mu0 * sum(sigma psi dS), psi the coil's potential.
Lengths in units of the cylinder's diameter.
"""
import numpy as np
from scipy.special import ellipk, ellipe, ellipkm1
from numpy.polynomial.legendre import leggauss

X8, W8 = leggauss(8)

def ring(r, z, a, zs):
    """Field and potential at (r, z) of rings of unit charge density times length: radius a at zs (no 2 pi a yet)."""
    dz = z - zs
    S2 = (r + a) ** 2 + dz ** 2
    D = (a - r) ** 2 + dz ** 2
    m1 = D / S2
    K, E = ellipkm1(m1), ellipe(1 - m1)
    S = np.sqrt(S2)
    q = 2 * np.pi * a / (4 * np.pi)
    phi = q * 2 / np.pi * K / S
    ez = q * 2 / np.pi * dz * E / (S * D)
    er = np.where(r > 0, q / (np.pi * np.where(r > 0, r, 1) * S) * (K - (a * a - r * r + dz * dz) / D * E), 0)
    return er, ez, phi

def over(r, z, p, q, deep=0):
    """Integral of the ring's field over a panel p..q (points (r,z)), refined near the field point."""
    L = np.hypot(*(q - p))
    mid = 0.5 * (p + q)
    d = np.hypot(r - mid[0], z - mid[1])
    if d > 1.5 * L or deep > 30:
        t = 0.5 * (X8 + 1)
        a = p[0] + t * (q[0] - p[0]); zs = p[1] + t * (q[1] - p[1])
        er, ez, ph = ring(r, z, a, zs)
        w = 0.5 * L * W8
        return np.array([w @ er, w @ ez, w @ ph])
    return over(r, z, p, mid, deep + 1) + over(r, z, mid, q, deep + 1)

def own(r, z, p, q):
    """A straight side panel on itself (field point at its middle)."""
    mid = 0.5 * (p + q)
    # graded towards the middle: t = v^4
    x, w = leggauss(24)
    v = 0.5 * (x + 1); wv = 0.5 * w
    half = 0.5 * (q - p); L = np.hypot(*half)
    t = v ** 3; wt = wv * 3 * v ** 2 * L
    out = np.zeros(3)
    for s in (1, -1):
        a = mid[0] + s * t * half[0]; zs = mid[1] + s * t * half[1]
        er, ez, ph = ring(r, z, a, zs)
        out += [wt @ er, wt @ ez, wt @ ph]
    return out

def mesh(g, n):
    """Upper half: side from the middle to the edge, end from the edge to the axis; graded."""
    R, H = 0.5, 0.5 * g
    # geometric grading towards the edge on both
    def graded(total, n):
        u = np.linspace(0, 1, n + 1)
        return total * (1 - (1 - u) ** 2)          # fine at the end u=1
    zs = graded(H, n)
    ne = max(12, n // 2)
    rs = R * (1 - np.linspace(0, 1, ne + 1) ** 2)  # fine at the edge
    side = [(np.array([R, a]), np.array([R, b]), 0) for a, b in zip(zs[:-1], zs[1:])]
    end = [(np.array([a, H]), np.array([b, H]), 1) for a, b in zip(rs[:-1], rs[1:])]
    return side + end

def coil_field(r, z, b, w):
    """Normal pieces (hr, hz, psi) of the coil of radius b and length w with 1 A/m."""
    out = np.zeros(3)
    for s in (1, -1):
        n = 6
        edges = b * (1 - np.linspace(0, 1, n + 1) ** 2)
        for p, q in zip(edges[:-1], edges[1:]):
            out += s * over(r, z, np.array([q, s * w / 2]), np.array([p, s * w / 2]))
    inside = abs(z) < w / 2 and r < b
    out[1] += 1.0 if inside else 0.0
    out[2] -= np.clip(z, -w / 2, w / 2)
    return out

class Rod:
    def __init__(self, g, n=60):
        self.g = g
        self.panels = mesh(g, n)
        self.mid = np.array([0.5 * (p + q) for p, q, _ in self.panels])
        self.area = np.array([2 * np.pi * m[0] * np.hypot(*(q - p)) for m, (p, q, _) in zip(self.mid, self.panels)])
        N = len(self.panels)
        A = np.zeros((N, N))
        mirror = np.array([1, -1.0])
        for i in range(N):
            r, z = self.mid[i]
            kind = self.panels[i][2]
            for j in range(N):
                p, q, _ = self.panels[j]
                f = own(r, z, p, q) if i == j and kind == 0 else (np.array([0, 0, 0]) if i == j else over(r, z, p, q))
                if i == j and kind == 1:
                    f = np.array([0.0, 0.0, 0.0])
                m = over(r, z, p * mirror, q * mirror)
                A[i, j] = f[kind] - m[kind]
        self.A = A
    def solve(self, chi, hn):
        return np.linalg.solve((1 / chi + 0.5) * np.eye(len(hn)) - self.A, hn)
    def uniform(self, chi):
        """Nm and Nf in a uniform field 1 A/m."""
        hn = np.array([0.0 if k == 0 else 1.0 for _, _, k in self.panels])
        s = self.solve(chi, hn)
        # mean M = (1/V) * 2 * sum sigma z dS (upper half) ; mid-plane flux of M: sum sigma dS of the upper half / area
        V = np.pi / 4 * self.g
        Mm = 2 * np.sum(s * self.mid[:, 1] * self.area) / V
        Mf = np.sum(s * self.area) / (np.pi / 4)
        return 1 / Mm - 1 / chi, 1 / Mf - 1 / chi, Mm
    def coil(self, chi, b, w):
        """Extra linkage of a coil with n turns/m = 1 per metre and 1 A: per mu0."""
        f = np.array([coil_field(r, z, b, w) for r, z in self.mid])
        hn = np.array([f[i][0] if self.panels[i][2] == 0 else f[i][1] for i in range(len(f))])
        s = self.solve(chi, hn)
        return -2 * np.sum(s * f[:, 2] * self.area)


def table():
    print("# a cylinder of constant susceptibility chi, length/diameter g, in a thin coil of radius b and length w (in diameters)")
    print("# own field solution by surface charges, axisymmetric, panels graded to the edge (open_cores.py beside this file),")
    print("# 110 panels on the upper half; the factors meet the exact ones of chi -> 0 (current sheet) within 1e-3 absolute.")
    print("# N_m: magnetometric demagnetizing factor, N_f: fluxmetric one; linkage: what the core adds to the linkage of a coil of")
    print("# one turn per diameter at 1 A, over mu0 and the diameter; the columns b and w are empty for the factors.")
    print("g,chi,b,w,N_m,N_f,linkage")
    for g in (1, 2, 4, 8):
        rod = Rod(g, 110)
        for chi in (5.0, 50.0, 2000.0):
            nm, nf, _ = rod.uniform(chi)
            print(f"{g},{chi:g},,,{nm:.5f},{nf:.5f},")
            if g > 1:
                for b, w in ((0.55, 0.9 * g), (0.55, 0.3 * g), (0.7, 0.6 * g), (0.8, 1.5 * g), (1.0, 0.5 * g)):
                    print(f"{g},{chi:g},{b},{w:g},,,{rod.coil(chi, b, w):.5e}")

if __name__ == "__main__":
    table()
