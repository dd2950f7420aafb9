"""States between bubble and dew of a blend: which liquid and which vapour stand side by side.

Successive substitution of the K-values (Michelsen and Mollerup, Thermodynamic Models, chapter 10),
together with the temperature or pressure and the vapour fraction in one vector, accelerated after
Anderson (1965). The library's own flash for this takes a hundred times as long and has holes.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from enum import Enum

from .phases import NoRoot, Phase
from .solvers import Point

ACCURACY = 2e-11
# Near an azeotrope rounding in the fugacities keeps the substitutions from settling further than this.
ROUGH_ACCURACY = 2e-9
DEPTH = 6
MARCH = 16
FINE = 1e-11


class Given(Enum):
    """Which quantity beside pressure or temperature is given."""

    VAPOUR_FRACTION = 1
    ENTHALPY = 2
    ENTROPY = 3
    BOTH = 4


@dataclass(frozen=True, slots=True)
class Split:
    """Liquid and vapour in equilibrium; mass units, the library's own datum.

    vapour_fraction: by mass [kg/kg].
    """

    temperature: float
    pressure: float
    vapour_fraction: float
    enthalpy: float
    entropy: float
    density: float


def rachford_rice(whole: Sequence[float], ratios: Sequence[float], start: float) -> float:
    """Return the molar vapour fraction for these K-values, held between 0 and 1.

    sum of z (K - 1) / (1 + b (K - 1)) = 0, solved for b (Rachford and Rice 1952).
    """

    def residual(b: float) -> float:
        return sum(z * (k - 1.0) / (1.0 + b * (k - 1.0)) for z, k in zip(whole, ratios, strict=True))

    if residual(0.0) <= 0.0:
        return 0.0
    if residual(1.0) >= 0.0:
        return 1.0
    low, high, b = 0.0, 1.0, min(max(start, 0.0), 1.0)
    for _ in range(60):
        value = residual(b)
        low, high = (b, high) if value > 0.0 else (low, b)
        slope = sum(z * ((k - 1.0) / (1.0 + b * (k - 1.0))) ** 2 for z, k in zip(whole, ratios, strict=True))
        following = b + value / slope if slope > 0.0 else math.nan
        if not low < following < high:
            following = 0.5 * (low + high)
        if abs(following - b) < 1e-15:
            break
        b = following
    return b


def least_squares(columns: list[list[float]], target: list[float]) -> list[float] | None:
    """Return the weights of the columns that come nearest to the target, None when they are dependent."""
    n = len(columns)
    rows = [
        [sum(a * b for a, b in zip(columns[i], columns[j], strict=True)) for j in range(n)]
        + [sum(a * b for a, b in zip(columns[i], target, strict=True))]
        for i in range(n)
    ]
    for i in range(n):
        rows[i][i] *= 1.0 + 1e-13
    for i in range(n):
        pivot = max(range(i, n), key=lambda r: abs(rows[r][i]))
        rows[i], rows[pivot] = rows[pivot], rows[i]
        if not abs(rows[i][i]) > 1e-280:
            return None
        for r in range(i + 1, n):
            factor = rows[r][i] / rows[i][i]
            rows[r] = [a - factor * b for a, b in zip(rows[r], rows[i], strict=True)]
    weights = [0.0] * n
    for i in reversed(range(n)):
        rest = sum(rows[i][j] * weights[j] for j in range(i + 1, n))
        weights[i] = (rows[i][n] - rest) / rows[i][i]
    return weights


def fixed_point(step: Callable[[list[float]], list[float]], start: list[float]) -> list[float]:
    """Return the vector that `step` maps onto itself (Anderson acceleration).

    Raises NoRoot when it does not settle.
    """
    here = start
    residuals: list[list[float]] = []
    images: list[list[float]] = []
    for round_ in range(120):
        image = step(here)
        residual = [a - b for a, b in zip(image, here, strict=True)]
        size = max(map(abs, residual))
        if size < (ACCURACY if round_ < 25 else ROUGH_ACCURACY):
            return image
        if residuals and size > 3.0 * max(map(abs, residuals[-1])):
            residuals.clear()
            images.clear()
        residuals.append(residual)
        images.append(image)
        del residuals[:-DEPTH], images[:-DEPTH]
        here = _mixed(residuals, images)
    raise NoRoot("the flash does not settle")


def _mixed(residuals: list[list[float]], images: list[list[float]]) -> list[float]:
    newest, image = residuals[-1], images[-1]
    if len(residuals) == 1:
        return image
    columns = [[a - b for a, b in zip(newest, r, strict=True)] for r in residuals[:-1]]
    weights = least_squares(columns, newest)
    if weights is None or max(map(abs, weights)) > 1e4:
        return image
    mixed = list(image)
    for weight, old in zip(weights, images[:-1], strict=True):
        for i, (a, b) in enumerate(zip(image, old, strict=True)):
            mixed[i] -= weight * (a - b)
    return mixed


def _molar(vapour_fraction: float, heavy: float, light: float) -> float:
    """Molar vapour fraction from the one by mass; heavy, light: molar masses of liquid and vapour [kg/mol]."""
    return vapour_fraction / light / (vapour_fraction / light + (1.0 - vapour_fraction) / heavy)


class Dome:
    """The two-phase region of one blend."""

    def __init__(self, liquid: Phase, vapour: Phase) -> None:
        self._liquid = liquid
        self._vapour = vapour
        self._whole = tuple(liquid.whole)
        self._molar_mass = liquid.molar_mass

    def split(self, bubble: Point, dew: Point, given: Given, value: float, share: float, pressure_given: bool) -> Split:
        """Return the equilibrium between two points of the curves at one pressure or one temperature.

        value: vapour fraction by mass [kg/kg], enthalpy [J/kg] or entropy [J/(kg K)] in the library's datum, or
        the pressure [Pa] when both are given, the points then being those of the temperature.
        share: first guess of the vapour fraction. Raises NoRoot.
        """
        flash = _Flash(self._liquid, self._vapour, given, value, pressure_given)
        return flash.run(bubble, dew, min(max(share, 0.0), 1.0))

    def split_slowly(self, bubble: Point, dew: Point, given: Given, wanted: float) -> Split:
        """Return the equilibrium on an isobar that has the wanted temperature [K], enthalpy or entropy.

        Slower than `split`, for blends whose components boil far apart: regula falsi with the Illinois weighting
        over the vapour fraction. given: BOTH means the temperature is wanted. Raises NoRoot.
        """
        low, high = 0.0, 1.0
        below = above = 0.0
        for _ in range(80):
            share = high - above * (high - low) / (above - below) if below < 0.0 < above else 0.5 * (low + high)
            flash = _Flash(self._liquid, self._vapour, Given.VAPOUR_FRACTION, share, True)
            split = flash.run(bubble, dew, share)
            excess = (
                split.temperature
                if given is Given.BOTH
                else split.enthalpy
                if given is Given.ENTHALPY
                else split.entropy
            ) - wanted
            if abs(excess) < FINE * abs(wanted) or high - low < FINE:
                return split
            if excess > 0.0:
                high, above, below = share, excess, 0.5 * below
            else:
                low, below, above = share, excess, 0.5 * above
        raise NoRoot("the flash does not settle")


class _Flash:
    """One flash: holds what stays from one substitution to the next, above all the two densities."""

    # ln T moves far less than ln K; weighing it up makes one accuracy serve both.
    WEIGHT = 10.0

    def __init__(self, liquid: Phase, vapour: Phase, given: Given, value: float, pressure_given: bool) -> None:
        self.liquid, self.vapour = liquid, vapour
        self.whole = liquid.whole
        self.given, self.value, self.pressure_given = given, value, pressure_given
        self.temperature = self.pressure = self.dense = self.thin = 0.0

    def run(self, bubble: Point, dew: Point, share: float) -> Split:
        try:
            end = fixed_point(self._substitute, self._start(bubble, dew, share))
        except NoRoot:
            if self.given is not Given.VAPOUR_FRACTION:
                raise
            end = self._march(bubble, dew)
        self._substitute(end)
        return self._result(end[-1])

    def _start(self, bubble: Point, dew: Point, share: float) -> list[float]:
        """A first vector between the two ends, exact at either."""

        def between(a: float, b: float) -> float:
            return math.exp((1.0 - share) * math.log(a) + share * math.log(b))

        ratios = [between(y / z, z / x) for x, y, z in zip(dew.other, bubble.other, self.whole, strict=True)]
        self.temperature, self.pressure = bubble.temperature, bubble.pressure
        if self.pressure_given:
            self.temperature = between(bubble.temperature, dew.temperature)
        else:
            self.pressure = between(bubble.pressure, dew.pressure)
        self.dense = between(bubble.liquid_density, dew.liquid_density)
        self.thin = between(bubble.vapour_density, dew.vapour_density)
        if self.given is Given.BOTH:
            # The ends are at other pressures; at one temperature K-values and gas density go with the pressure.
            self.pressure = self.value
            change = between(bubble.pressure, dew.pressure) / self.pressure
            ratios = [ratio * change for ratio in ratios]
            self.thin /= change
            share = rachford_rice(self.whole, ratios, share)
        free = self.temperature if self.pressure_given else self.pressure
        return [*map(math.log, ratios), self.WEIGHT * math.log(free), share]

    def _march(self, bubble: Point, dew: Point) -> list[float]:
        """Go to the wanted vapour fraction in steps from the nearer end, for blends of very unlike components."""
        wanted = self.value
        end = 0.0 if wanted < 0.5 else 1.0
        vector = self._start(bubble, dew, end)
        for step in range(1, MARCH + 1):
            self.value = end + (wanted - end) * step / MARCH
            vector = fixed_point(self._substitute, vector)
        return vector

    def _substitute(self, vector: list[float]) -> list[float]:
        """One substitution: K-values to compositions to fugacities to K-values."""
        share = vector[-1]
        if not -0.2 < share < 1.2:
            raise NoRoot("outside the two-phase region")
        free = math.exp(vector[-2] / self.WEIGHT)
        if self.pressure_given:
            self.temperature = free
        else:
            self.pressure = free
        ratios = [math.exp(k) for k in vector[:-2]]
        left = [z / (1.0 + share * (k - 1.0)) for z, k in zip(self.whole, ratios, strict=True)]
        right = [k * x for k, x in zip(ratios, left, strict=True)]
        if min(left) <= 0.0 or min(right) <= 0.0:
            raise NoRoot("negative composition")
        xs = [x / sum(left) for x in left]
        ys = [y / sum(right) for y in right]
        self.liquid.compose(xs)
        self.vapour.compose(ys)
        self.dense = self.liquid.settle(self.pressure, self.temperature, self.dense)
        self.thin = self.vapour.settle(self.pressure, self.temperature, self.thin)
        if self.dense < 1.0005 * self.thin:
            raise NoRoot("the phases have merged")
        logs = [
            a - math.log(x) - b + math.log(y)
            for a, x, b, y in zip(self.liquid.log_fugacities(), xs, self.vapour.log_fugacities(), ys, strict=True)
        ]
        return self._corrected(logs, vector)

    def _corrected(self, logs: list[float], vector: list[float]) -> list[float]:
        share, weighted = vector[-1], vector[-2]
        ratios = [math.exp(k) for k in logs]
        if self.given is Given.BOTH:
            return [*logs, weighted, rachford_rice(self.whole, ratios, share)]
        residual = slope = 0.0
        for z, k in zip(self.whole, ratios, strict=True):
            part = 1.0 + share * (k - 1.0)
            residual += z * (k - 1.0) / part
            slope += z * k / (part * part)
        move = -residual / slope  # of every ln K
        gas_temperature = self.liquid.gas_constant * self.temperature
        if self.pressure_given:
            latent = self.vapour.state.hmolar() - self.liquid.state.hmolar()
            free = move * gas_temperature / latent
        else:
            free = -move / (self.pressure / gas_temperature * (1.0 / self.thin - 1.0 / self.dense))
        most = 0.05 if self.pressure_given else 0.5
        free = min(max(free, -most), most)
        return [*(k + move for k in logs), weighted + self.WEIGHT * free, self._share()]

    def _share(self) -> float:
        """The molar vapour fraction that the given quantity asks for."""
        liquid, vapour = self.liquid.state, self.vapour.state
        heavy, light = float(liquid.molar_mass()), float(vapour.molar_mass())
        if self.given is Given.VAPOUR_FRACTION:
            return _molar(self.value, heavy, light)
        if self.given is Given.ENTHALPY:
            low, high = float(liquid.hmass()), float(vapour.hmass())
        else:
            low, high = float(liquid.smass()), float(vapour.smass())
        return _molar((self.value - low) / (high - low), heavy, light)

    def _result(self, share: float) -> Split:
        liquid, vapour = self.liquid.state, self.vapour.state
        heavy, light = float(liquid.molar_mass()), float(vapour.molar_mass())
        mass = share * light / (share * light + (1.0 - share) * heavy)

        def mean(low: float, high: float) -> float:
            return (1.0 - mass) * low + mass * high

        return Split(
            temperature=self.temperature,
            pressure=self.pressure,
            vapour_fraction=mass,
            enthalpy=mean(liquid.hmass(), vapour.hmass()),
            entropy=mean(liquid.smass(), vapour.smass()),
            density=1.0 / mean(1.0 / liquid.rhomass(), 1.0 / vapour.rhomass()),
        )
