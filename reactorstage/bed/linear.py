"""Small dense linear algebra inside the kernel: LU with partial pivoting, real or complex, in place."""

from __future__ import annotations

from reactorstage.bed.compiled import compiled


@compiled
def factorise(M, n, pivot):
    """LU factors of M (n * n,) in place with row exchanges in pivot (n,); False when M is singular."""
    for k in range(n):
        best, row = abs(M[k * n + k]), k
        for i in range(k + 1, n):
            if abs(M[i * n + k]) > best:
                best, row = abs(M[i * n + k]), i
        pivot[k] = row
        if not best > 0.0:
            return False
        if row != k:
            for j in range(n):
                M[k * n + j], M[row * n + j] = M[row * n + j], M[k * n + j]
        for i in range(k + 1, n):
            if M[i * n + k] != 0.0:
                M[i * n + k] /= M[k * n + k]
                for j in range(k + 1, n):
                    M[i * n + j] -= M[i * n + k] * M[k * n + j]
    return True


@compiled
def substitute(M, n, pivot, b):
    """Solve with the factors of `factorise`; the right-hand side b (n,) becomes the solution."""
    for k in range(n):
        row = pivot[k]
        if row != k:
            b[k], b[row] = b[row], b[k]
    for i in range(1, n):
        total = b[i]
        for j in range(i):
            total -= M[i * n + j] * b[j]
        b[i] = total
    for i in range(n - 1, -1, -1):
        total = b[i]
        for j in range(i + 1, n):
            total -= M[i * n + j] * b[j]
        b[i] = total / M[i * n + i]


@compiled
def substitute_many(M, n, pivot, b, D):
    """As `substitute` for the D columns of b (n * D,) at once."""
    for k in range(n):
        row = pivot[k]
        if row != k:
            for d in range(D):
                b[k * D + d], b[row * D + d] = b[row * D + d], b[k * D + d]
    for i in range(1, n):
        for j in range(i):
            factor = M[i * n + j]
            if factor != 0.0:
                for d in range(D):
                    b[i * D + d] -= factor * b[j * D + d]
    for i in range(n - 1, -1, -1):
        for j in range(i + 1, n):
            factor = M[i * n + j]
            if factor != 0.0:
                for d in range(D):
                    b[i * D + d] -= factor * b[j * D + d]
        inverse = 1.0 / M[i * n + i]
        for d in range(D):
            b[i * D + d] *= inverse
