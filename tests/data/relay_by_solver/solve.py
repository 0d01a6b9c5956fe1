"""Operate and release of a relay with an armature, by a general-purpose solver with events (scipy's solve_ivp, DOP853).

Equations by hand, states: flux linkage y [Wb], gap x [m], its rate v [m/s].
  dy/dt = u - R i(y, x),   i = (H(B) l + (B/mu0) (g + x))/N,   B = y/(N A)
  B = mu0 H + Js H/(|H| + Ha), Ha = Js/(mu0 (mu_i - 1)), solved for H in closed form
  m dv/dt = -y^2/(2 mu0 A N^2) + preload + rate (open - x) - damping v
Impact on a stop: v becomes -e v; the armature rests there once its rebound would rise by less than a millionth of the stroke,
and leaves when the net force turns. u is 24 V from 5 ms to 60 ms, 0 V before and after (a short circuit).

python3 solve.py > relay.csv        (needs numpy and scipy)
"""

import numpy as np
from scipy.integrate import solve_ivp

MU0 = 4e-7 * np.pi
N, A, L, G = 4000.0, 50e-6, 60e-3, 0.05e-3
MU_I, JS = 3000.0, 1.5
HA = JS / (MU0 * (MU_I - 1.0))
R, U = 400.0, 24.0
MASS, OPEN, SEATED = 4e-3, 0.6e-3, 0.05e-3
PRELOAD, RATE, DAMPING, E = 0.5, 1200.0, 0.1, 0.3
CONTACT = 0.25e-3
ON, OFF, END = 5e-3, 60e-3, 120e-3


def field(b):
    """H of B >= 0: mu0 H^2 + (mu0 Ha + Js - B) H - B Ha = 0, in the form that does not cancel."""
    p = MU0 * HA + JS - b
    root = np.sqrt(p * p + 4.0 * MU0 * b * HA)
    return 2.0 * b * HA / (p + root) if p > 0 else (root - p) / (2.0 * MU0)


def current(y, x):
    b = abs(y) / (N * A)
    return np.sign(y) * (field(b) * L + b / MU0 * (G + x)) / N


def pull(y):
    return y * y / (2.0 * MU0 * A * N * N)


def spring(x):
    return PRELOAD + RATE * (OPEN - x)


def voltage(t):
    return U if ON <= t < OFF else 0.0


class Run:
    def __init__(self):
        self.t, self.s, self.state = 0.0, np.array([0.0, OPEN, 0.0]), "open"
        self.seen, self.peaks = [], []

    def right(self, u):
        def free(t, s):
            y, x, v = s
            return [u - R * current(y, x), v, (-pull(y) + spring(x) - DAMPING * v) / MASS]

        def held(t, s):
            return [u - R * current(s[0], s[1]), 0.0, 0.0]

        return free if self.state == "free" else held

    def events(self):
        def event(function, direction, ends=True):
            function.direction, function.terminal = direction, ends
            return function

        if self.state == "free":
            return {
                "outer": event(lambda t, s: s[1] - OPEN if s[2] > 0 else -1e-9, 1),
                "seat": event(lambda t, s: SEATED - s[1] if s[2] < 0 else -1e-9, 1),
                "closes": event(lambda t, s: CONTACT - s[1], 1, False),
                "opens": event(lambda t, s: s[1] - CONTACT, 1, False),
            }
        sign = 1.0 if self.state == "open" else -1.0
        return {"leaves": event(lambda t, s: sign * (pull(s[0]) - spring(s[1])), 1)}

    def to(self, end):
        while self.t < end:
            names, functions = zip(*self.events().items())
            u = voltage(self.t)
            done = solve_ivp(self.right(u), (self.t, end), self.s, "DOP853", events=functions, rtol=1e-11,
                             atol=[1e-13, 1e-14, 1e-11], max_step=1e-4)
            assert done.success, done.message
            for name, times, states in zip(names, done.t_events, done.y_events):
                for t, s in zip(times, states):
                    if name in ("closes", "opens"):
                        self.seen.append((name, t, current(s[0], s[1])))
            self.t, self.s = done.t[-1], done.y[:, -1].copy()
            if done.status == 1:
                self.take([name for name, times in zip(names, done.t_events) if len(times) and name not in ("closes", "opens")][0])

    def take(self, name):
        y, x, v = self.s
        if name == "leaves":
            self.seen.append(("leaves_" + self.state, self.t, current(y, x)))
            self.state = "free"
            return
        stop = OPEN if name == "outer" else SEATED
        self.seen.append(("strikes_" + name, self.t, v))
        left = -E * v
        holding = (spring(stop) - pull(y)) if name == "outer" else (pull(y) - spring(stop))
        rests = 0.5 * MASS * left * left <= holding * 1e-6 * (OPEN - SEATED)
        self.s = np.array([y, stop, 0.0 if rests else left])
        if rests:
            self.state = "open" if name == "outer" else "seated"


run = Run()
for end in (ON, OFF, END):
    run.to(end)
print("# Operate and release of a relay with an armature, by scipy's solve_ivp (DOP853, rtol 1e-11) with events: solve.py.")
print("# value: winding current [A]; speed of the gap [m/s] for strikes.")
print("event,number,time_s,value")
counts = {}
for name, t, value in run.seen:
    counts[name] = counts.get(name, 0) + 1
    print(f"{name},{counts[name]},{t:.12e},{value:.9e}")
