"""Fortran 2008: a module with nodes and weights as constants, with all digits, and a function that applies the rule.

Numbers come in two kinds: ``real64``, and ``quad``, which is ``real128`` where the compiler has it. The literals stand
once, in the larger kind. Arrays are put together from one constant per node, since a statement has few lines.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from simplexcub.rule import Rule
from simplexcub.table.program import header, name, real

_PER_LINE = 10
_CODE = """\
module {name}
   use, intrinsic :: iso_fortran_env, only: real64, real128
   implicit none
   private
   public :: quad, n, size_of_rule, degree, nodes, weights, nodes_quad, weights_quad, integrand, mean

   !> real128 where there is such a kind, real64 otherwise
   integer, parameter :: quad = merge(real128, real64, real128 > 0)
   !> components of a node, number of nodes, degree of exactness
   integer, parameter :: n = {n}, size_of_rule = {size}, degree = {degree}

{nodes}

   !> node k is nodes_quad(:, k)
   real(quad), parameter :: nodes_quad(n, size_of_rule) = reshape([ &
{joined} &
      ], [n, size_of_rule])
{weights}
   real(quad), parameter :: weights_quad(size_of_rule) = [ &
{joined_weights} &
      ]
   real(real64), parameter :: nodes(n, size_of_rule) = real(nodes_quad, real64)
   real(real64), parameter :: weights(size_of_rule) = real(weights_quad, real64)

   abstract interface
      function integrand(x) result(value)
         import :: real64
         real(real64), intent(in) :: x(:)
         real(real64) :: value
      end function integrand
   end interface

contains

   !> sum of weight times f(node): the mean of f
   function mean(f) result(total)
      procedure(integrand) :: f
      real(real64) :: total
      integer :: k
      total = 0
      do k = 1, size_of_rule
         total = total + weights(k)*f(nodes(:, k))
      end do
   end function mean

end module {name}
"""


def export(rule: Rule) -> str:
    """The rule as Fortran source."""
    called = name(rule)
    comment = [*header(rule), "", f"Use:  use {called}, only: nodes, weights, mean"]
    count = range(1, len(rule) + 1)
    code = _CODE.format(
        name=called,
        n=rule.measure.N,
        size=len(rule),
        degree=rule.degree,
        nodes="\n".join(_node(k, node) for k, node in zip(count, rule.node_decimals, strict=True)),
        joined=_joined(f"p{k}" for k in count),
        weights="\n".join(
            f"   real(quad), parameter :: w{k} = {real(w)}_quad"
            for k, w in zip(count, rule.weight_decimals, strict=True)
        ),
        joined_weights=_joined(f"w{k}" for k in count),
    )
    return "\n".join([*(f"! {line}".rstrip() for line in comment), "", code])


def _node(k: int, node: Sequence[str]) -> str:
    """One constant for each node, one line for each of its coordinates."""
    values = ", &\n".join(f"      {real(x)}_quad" for x in node)
    return f"   real(quad), parameter :: p{k}(n) = [ &\n{values}]"


def _joined(names: Iterable[str]) -> str:
    listed = list(names)
    lines = [", ".join(listed[i : i + _PER_LINE]) for i in range(0, len(listed), _PER_LINE)]
    return ", &\n".join(f"      {line}" for line in lines)
