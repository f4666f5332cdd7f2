"""What one option is worth, in plain Python: Black-Scholes and Bjerksund-Stensland 2002.

Written from the formulas of the papers for the replay beside it. Rates and yields are continuously compounded
fractions a year, times are years, values are money a share.
"""

from __future__ import annotations

import math
from functools import lru_cache

CALL, PUT = 0, 1


def normal_cdf(x: float) -> float:
    """Chance that a standard normal is at most `x`."""
    return 0.5 * math.erfc(-x / math.sqrt(2.0))


@lru_cache(maxsize=8)
def legendre_nodes(count: int) -> tuple[tuple[float, float], ...]:
    """Nodes and weights of Gauss-Legendre quadrature on [-1, 1], by Newton's method on the polynomial."""
    nodes = []
    for i in range(count):
        x = math.cos(math.pi * (i + 0.75) / (count + 0.5))
        slope = 1.0
        for _ in range(100):
            before, here = 1.0, x
            for n in range(2, count + 1):
                before, here = here, ((2 * n - 1) * x * here - (n - 1) * before) / n
            slope = count * (x * here - before) / (x * x - 1.0)
            step = here / slope
            x -= step
            if abs(step) < 1e-16:
                break
        nodes.append((x, 2.0 / ((1.0 - x * x) * slope * slope)))
    return tuple(nodes)


@lru_cache(maxsize=4)
def arc_of_correlation(correlation: float) -> tuple[tuple[float, float, float], ...]:
    """Weight, twice the sine and 1 / (2 cosine^2) at each node of the arc from none to that correlation."""
    top = math.asin(correlation)
    angles = [(weight, 0.5 * top * (node + 1.0)) for node, weight in legendre_nodes(32)]
    scale = 0.25 * top / math.pi
    return tuple((weight * scale, 2.0 * math.sin(x), 0.5 / math.cos(x) ** 2) for weight, x in angles)


def both_below(a: float, b: float, correlation: float) -> float:
    """Chance that two standard normals of that correlation stay below `a` and `b`.

    Plackett's integral over the correlation, with its sine as the variable (Genz 2004, equation 3).
    """
    squares, product = a * a + b * b, a * b
    if squares > 2000.0:
        a, b = max(-38.0, min(38.0, a)), max(-38.0, min(38.0, b))
        squares, product = a * a + b * b, a * b
    joint = 0.0
    for weight, sine, scale in arc_of_correlation(correlation):
        joint += weight * math.exp((product * sine - squares) * scale)
    return normal_cdf(a) * normal_cdf(b) + joint


def european(
    right: int, spot: float, strike: float, years: float, rate: float, carry_yield: float, volatility: float
) -> float:
    """Black-Scholes-Merton value; the intrinsic value without time or volatility left."""
    sign = 1.0 if right == CALL else -1.0
    here, there = spot * math.exp(-carry_yield * years), strike * math.exp(-rate * years)
    spread = volatility * math.sqrt(years) if years > 0.0 else 0.0
    if spread <= 0.0 or spot <= 0.0:
        return max(0.0, sign * (here - there))
    d1 = math.log(here / there) / spread + 0.5 * spread
    return sign * (here * normal_cdf(sign * d1) - there * normal_cdf(sign * (d1 - spread)))


class TwoStepCall:
    """The American call of Bjerksund & Stensland 2002: a flat boundary in each of two spans of time."""

    def __init__(
        self, spot: float, strike: float, years: float, rate: float, carry: float, vol: float
    ) -> None:
        self.spot, self.strike, self.years, self.rate, self.carry, self.vol = (
            spot,
            strike,
            years,
            rate,
            carry,
            vol,
        )
        variance = vol * vol
        lean = carry / variance - 0.5
        self.beta = -lean + math.sqrt(lean * lean + 2.0 * rate / variance)
        self.split = 0.5 * (math.sqrt(5.0) - 1.0) * years
        self.late, self.early = self._boundary(self.split), self._boundary(years)

    def _boundary(self, years: float) -> float:
        """The flat boundary for a span of `years`."""
        far = self.beta / (self.beta - 1.0) * self.strike
        near = max(self.strike, self.rate / (self.rate - self.carry) * self.strike)
        h = -(self.carry * years + 2.0 * self.vol * math.sqrt(years))
        h *= self.strike * self.strike / ((far - near) * near)
        return near + (far - near) * (1.0 - math.exp(h))

    def _growth(self, gamma: float) -> tuple[float, float, float]:
        """Lambda, kappa and the drift that belong to a power `gamma` of the price."""
        variance = self.vol * self.vol
        growth = -self.rate + gamma * self.carry + 0.5 * gamma * (gamma - 1.0) * variance
        kappa = 2.0 * self.carry / variance + 2.0 * gamma - 1.0
        return growth, kappa, self.carry + (gamma - 0.5) * variance

    def _phi(self, years: float, gamma: float, level: float, barrier: float) -> float:
        """Value of S^gamma paid at `years` when below `level`, the barrier never touched."""
        growth, kappa, drift = self._growth(gamma)
        spread, s = self.vol * math.sqrt(years), self.spot
        first = -(math.log(s / level) + drift * years) / spread
        second = -(math.log(barrier * barrier / (s * level)) + drift * years) / spread
        inner = normal_cdf(first) - (barrier / s) ** kappa * normal_cdf(second)
        return math.exp(growth * years) * s**gamma * inner

    def _psi(self, gamma: float, level: float) -> float:
        """Value of S^gamma paid at expiry when below `level`, neither barrier touched in its span."""
        growth, kappa, drift = self._growth(gamma)
        s, high, low, t, years = self.spot, self.early, self.late, self.split, self.years
        near, far = self.vol * math.sqrt(t), self.vol * math.sqrt(years)
        rho = math.sqrt(t / years)
        up = math.log(s / low)
        over = math.log(high * high / (s * low))
        d = [up + drift * t, over + drift * t, up - drift * t, over - drift * t]
        e = [
            s / level,
            high * high / (s * level),
            low * low / (s * level),
            s * low * low / (level * high * high),
        ]
        m = [
            both_below(-d[i] / near, -(math.log(e[i]) + drift * years) / far, rho if i < 2 else -rho)
            for i in range(4)
        ]
        inner = m[0] - (high / s) ** kappa * m[1] - (low / s) ** kappa * m[2] + (low / high) ** kappa * m[3]
        return math.exp(growth * years) * s**gamma * inner

    def value(self) -> float:
        """Value of the call, at least what exercising now brings."""
        s, k, high, low, t, beta = self.spot, self.strike, self.early, self.late, self.split, self.beta
        if s >= high:
            return s - k
        a2, a1 = (high - k) * high**-beta, (low - k) * low**-beta
        total = a2 * s**beta - a2 * self._phi(t, beta, high, high)
        total += self._phi(t, 1.0, high, high) - self._phi(t, 1.0, low, high)
        total += k * (self._phi(t, 0.0, low, high) - self._phi(t, 0.0, high, high))
        total += a1 * (self._phi(t, beta, low, high) - self._psi(beta, low))
        total += self._psi(1.0, low) - self._psi(1.0, k)
        total += k * (self._psi(0.0, k) - self._psi(0.0, low))
        return total


def american(
    right: int, spot: float, strike: float, years: float, rate: float, carry_yield: float, volatility: float
) -> float:
    """American value; the put as a call with spot and strike, rate and yield changed over (eq. 20)."""
    if right == PUT:
        spot, strike, rate, carry_yield = strike, spot, carry_yield, rate
    if years <= 0.0 or volatility <= 0.0:
        return max(0.0, spot - strike)
    if carry_yield <= 0.0 and rate >= 0.0:
        return european(CALL, spot, strike, years, rate, carry_yield, volatility)
    return TwoStepCall(spot, strike, years, rate, rate - carry_yield, volatility).value()


def call_across_dividend(
    base: float, strike: float, years: float, rate: float, volatility: float, to_ex: float, amount: float
) -> float:
    """A call that may be exercised just before `amount` goes ex in `to_ex` years, or at expiry.

    `base` is the price less the dividend's present value. At the ex-date the holder takes the better of
    exercising and keeping; the mean of that over the price then is taken in closed form where exercise is
    better and by quadrature where it is not.
    """
    left = years - to_ex
    plain = european(CALL, base, strike, years, rate, 0.0, volatility)
    if amount <= strike * (1.0 - math.exp(-rate * left)):
        return max(plain, base + amount * math.exp(-rate * to_ex) - strike)

    def gain_of_keeping(price: float) -> float:
        """What keeping is worth over exercising, at the ex-date, at a price without the dividend."""
        kept = european(CALL, price, strike, left, rate, 0.0, volatility)
        return kept - (price + amount - strike)

    low, high = 1e-6 * strike, 100.0 * strike
    for _ in range(70):
        middle = 0.5 * (low + high)
        low, high = (middle, high) if gain_of_keeping(middle) > 0.0 else (low, middle)
    spread, drift = volatility * math.sqrt(to_ex), (rate - 0.5 * volatility**2) * to_ex
    edge = (math.log(0.5 * (low + high) / base) - drift) / spread
    exercised = base * normal_cdf(spread - edge)
    exercised -= (strike - amount) * math.exp(-rate * to_ex) * normal_cdf(-edge)
    kept, floor = 0.0, -9.0
    top = min(edge, 9.0)
    for node, weight in legendre_nodes(64):
        z = floor + 0.5 * (top - floor) * (node + 1.0)
        price = base * math.exp(drift + spread * z)
        density = math.exp(-0.5 * z * z) / math.sqrt(2.0 * math.pi)
        kept += weight * density * european(CALL, price, strike, left, rate, 0.0, volatility)
    kept *= 0.5 * max(0.0, top - floor) * math.exp(-rate * to_ex)
    return max(exercised + kept, plain, base + amount * math.exp(-rate * to_ex) - strike)
