"""Small dense linear algebra inside the kernel: LU with partial pivoting, real or complex, in place."""

from __future__ import annotations

from reactorstage.bed.compiled import compiled


@compiled
def factorise(M, pivot):
    """LU factors of M (n, n) in place with row exchanges in pivot (n,); False when M is singular."""
    n = M.shape[0]
    for k in range(n):
        best, row = abs(M[k, k]), k
        for i in range(k + 1, n):
            if abs(M[i, k]) > best:
                best, row = abs(M[i, k]), i
        pivot[k] = row
        if not best > 0.0:
            return False
        if row != k:
            for j in range(n):
                M[k, j], M[row, j] = M[row, j], M[k, j]
        for i in range(k + 1, n):
            if M[i, k] != 0.0:
                M[i, k] /= M[k, k]
                for j in range(k + 1, n):
                    M[i, j] -= M[i, k] * M[k, j]
    return True


@compiled
def substitute(M, pivot, b):
    """Solve with the factors of `factorise`; the right-hand side b (n,) becomes the solution."""
    n = M.shape[0]
    for k in range(n):
        row = pivot[k]
        if row != k:
            b[k], b[row] = b[row], b[k]
    for i in range(1, n):
        total = b[i]
        for j in range(i):
            total -= M[i, j] * b[j]
        b[i] = total
    for i in range(n - 1, -1, -1):
        total = b[i]
        for j in range(i + 1, n):
            total -= M[i, j] * b[j]
        b[i] = total / M[i, i]


@compiled
def substitute_many(M, pivot, b):
    """As `substitute` for the columns of b (n, D) at once."""
    n, D = b.shape
    for k in range(n):
        row = pivot[k]
        if row != k:
            for d in range(D):
                b[k, d], b[row, d] = b[row, d], b[k, d]
    for i in range(1, n):
        for j in range(i):
            factor = M[i, j]
            if factor != 0.0:
                for d in range(D):
                    b[i, d] -= factor * b[j, d]
    for i in range(n - 1, -1, -1):
        for j in range(i + 1, n):
            factor = M[i, j]
            if factor != 0.0:
                for d in range(D):
                    b[i, d] -= factor * b[j, d]
        inverse = 1.0 / M[i, i]
        for d in range(D):
            b[i, d] *= inverse
