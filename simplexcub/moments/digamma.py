"""Numbers r + Σ_x b_x ψ(x) with rational r, b_x and x, Σ b_x = 0: the closed form of every mean logarithm here.

ψ(x + 1) = ψ(x) + 1/x brings each argument into (0, 1], where equal arguments merge. What is left is rational where the
digamma terms cancel, and r + s·ln 2 where only ψ(1) and ψ(1/2) = ψ(1) − 2 ln 2 remain.

Reference: M. Abramowitz, I. A. Stegun, *Handbook of Mathematical Functions* (1964), 6.3.2–6.3.5.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from decimal import Decimal
from fractions import Fraction

from mpmath import mp, mpf

from simplexcub.errors import InputError

MOST_STEPS = 50_000  # longer sums of reciprocals make fractions of more digits than anyone reads


@dataclass(frozen=True)
class DigammaSum:
    """An exact number r + Σ b_x ψ(x); build it with :meth:`of`, which reduces the arguments.

    Attributes
    ----------
    rational : Fraction
        r.
    digammas : tuple of (Fraction, Fraction)
        Pairs (x, b_x), sorted, b_x ≠ 0, with x in (0, 1] unless it is very large.

    Examples
    --------
    >>> DigammaSum.of(1, {Fraction(3): 1, Fraction(1): -1})
    DigammaSum(rational=Fraction(5, 2), digammas=())
    >>> print(DigammaSum.of(1, {Fraction(1, 2): 1, Fraction(1): -1}))
    1 - 2 ln 2
    """

    rational: Fraction
    digammas: tuple[tuple[Fraction, Fraction], ...] = ()

    @classmethod
    def of(cls, rational: Fraction | int, digammas: Mapping[Fraction, Fraction | int]) -> DigammaSum:
        """r + Σ b_x ψ(x) for any x > 0, reduced; an argument more than `MOST_STEPS` above its like stays as it is."""
        total = Fraction(rational)
        reduced: dict[Fraction, Fraction] = {}
        lowest: dict[Fraction, Fraction] = {}
        for x, b in sorted(digammas.items()):
            base = lowest.setdefault(x % 1, x)
            kept = base if x - base <= MOST_STEPS else x
            total += b * _reciprocals(kept, int(x - kept))
            reduced[kept] = reduced.get(kept, Fraction(0)) + b
        final: dict[Fraction, Fraction] = {}
        for x, b in reduced.items():
            steps = -(-x.numerator // x.denominator) - 1
            kept = x - steps if b and steps <= MOST_STEPS else x
            total += b * _reciprocals(kept, int(x - kept))
            final[kept] = final.get(kept, Fraction(0)) + b
        return cls(total, tuple(sorted((x, b) for x, b in final.items() if b)))

    @property
    def is_rational(self) -> bool:
        """Whether no digamma is left."""
        return not self.digammas

    @property
    def fraction(self) -> Fraction:
        """The exact value where it is rational.

        Raises
        ------
        InputError
            A logarithm or digamma is left.
        """
        if self.digammas:
            kept = ", ".join(f"ψ({x})" for x, _ in self.digammas[:3])
            raise InputError("the value must be rational to be a fraction", f"terms in {kept}", "Take value(dps).")
        return self.rational

    @property
    def log_two(self) -> Fraction | None:
        """The coefficient s where the number is r + s·ln 2, else None."""
        if self.is_rational:
            return Fraction(0)
        arguments = dict(self.digammas)
        half = arguments.get(Fraction(1, 2))
        if len(arguments) == 2 and half is not None and arguments.get(Fraction(1)) == -half:
            return -2 * half
        return None

    def value(self, dps: int = 50) -> mpf:
        """The number to `dps` significant digits."""
        extra = 20
        while True:
            with mp.workdps(dps + extra):
                terms = [mpf(self.rational.numerator) / self.rational.denominator]
                for x, b in self.digammas:
                    terms.append(mpf(b.numerator) / b.denominator * mp.digamma(mpf(x.numerator) / x.denominator))
                total = mp.fsum(terms)
                lost = max(mp.mag(t) for t in terms) - mp.mag(total) if total else 0
            if lost * 0.302 < extra - 5 or extra > 50 * dps + 2000:
                with mp.workdps(dps):
                    return +total
            extra = int(lost * 0.302) + 20

    def __neg__(self) -> DigammaSum:
        return DigammaSum(-self.rational, tuple((x, -b) for x, b in self.digammas))

    def __add__(self, other: DigammaSum) -> DigammaSum:
        joined = dict(self.digammas)
        for x, b in other.digammas:
            joined[x] = joined.get(x, Fraction(0)) + b
        return DigammaSum.of(self.rational + other.rational, joined)

    def __rmul__(self, factor: Fraction | int) -> DigammaSum:
        return DigammaSum.of(factor * self.rational, {x: factor * b for x, b in self.digammas})

    def __str__(self) -> str:
        two = self.log_two
        extra = [(two, "ln 2")] if two is not None else [(b, f"ψ({x})") for x, b in self.digammas]
        text = fraction_text(self.rational) if self.rational or not any(b for b, _ in extra) else ""
        for b, name in extra:
            if b:
                size = "" if abs(b) == 1 else f"{fraction_text(abs(b))} "
                text += (" - " if b < 0 else " + ") + size + name if text else ("-" if b < 0 else "") + size + name
        return text


def fraction_text(value: Fraction) -> str:
    """The fraction in digits, however many; ``str`` alone refuses integers beyond some thousands."""
    top = format(Decimal(value.numerator), "f")
    return top if value.denominator == 1 else f"{top}/{format(Decimal(value.denominator), 'f')}"


def _reciprocals(start: Fraction, count: int) -> Fraction:
    """Σ_{j<count} 1/(start + j), by halving, so that the fractions stay short."""
    if count <= 8:
        return sum((1 / (start + j) for j in range(count)), Fraction(0))
    half = count // 2
    return _reciprocals(start, half) + _reciprocals(start + half, count - half)
