\\ Exact loop coefficients of one operator family (L, M), written straight in PARI/GP.
\\
\\   gp -q -s 2G series.gp   then   series(8, 4)
\\
\\ One number field per Galois orbit, exact arithmetic in it (t_POLMOD), the same steps as
\\ any careful hand calculation: cyclic states, transfer matrix T(v), Baxter pair Q1, Q2,
\\ lift order by order in h = g^2 with the dressing phase through h^(L-1), and the leading
\\ finite-size term at h^L (twist limit for states with roots at v = +-1/2).
\\ Conventions: v = -i u, g^2 = lambda/(16 pi^2); "n loops" = h^n.
\\
\\ Sources by key: PS hep-th/9808153, BS hep-th/0504190, BES hep-th/0610251, VV arXiv:1012.3992,
\\ BJ arXiv:0807.0399, NW arXiv:1409.7382.
\\
\\ Variables, highest priority first: x = spectral variable v, y = 1/Y, s and t for the finite-size
\\ term, tau for the twist, z3, z5, ... for the zeta values, k for the field generator.

[x, y, s, t, tau];
z = vector(64, i, eval(Str("z", 2*i + 1)));          \\ z[i] stands for zeta(2i+1)
k;

\\ ---------------------------------------------------------------- chain spectrum
necklace(c, L) = { my(b = c, m = c, full = 1 << L); for (i = 2, L, b <<= 1; if (b >= full, b -= full - 1); if (b < m, m = b)); m };
necklaces(L, M) = { my(S = List()); forsubset([L, M], p, listput(S, necklace(sum(i = 1, M, 1 << (p[i] - 1)), L))); Set(S) };

\\ T(v) applied to the configuration c: a map from necklaces to polynomials in a = v - 1/2.
\\ Each site multiplies by (v - 1/2) + P; equal spins give v + 1/2, different ones v - 1/2 or a swap.
transferrow(c, L, where, dimension) =
{ my(row = vector(dimension, i, vector(L + 1)), a, b, u, stack, top, sp);
  for (a0 = 0, 1,
    \\ state: [auxiliary spin, output configuration, number of (v-1/2), number of (v+1/2)], site by site
    my(level = Map()); mapput(~level, [a0, 0], [1]~);
    for (i = 0, L - 1, sp = bittest(c, i);
      my(after = Map());
      foreach (Mat(level)~, col, 
        my(aux = col[1][1], out = col[1][2], poly = col[2]);
        if (aux == sp,
          addto(~after, [aux, out + (sp << i)], concat(poly, [0]~) + concat([0]~, poly));
        ,
          addto(~after, [aux, out + (sp << i)], concat([0]~, poly));
          addto(~after, [sp, out + (aux << i)], concat(poly, [0]~))));
      level = after);
    foreach (Mat(level)~, col,
      if (col[1][1] == a0,
        my(n = mapget(where, necklace(col[1][2], L)));
        row[n] += col[2]~)));
  row };
addto(~m, key, p) = { my(old); if (mapisdefined(m, key, &old), mapput(~m, key, old + p), mapput(~m, key, p)) };

\\ Matrices T_j of the coefficients of (v - 1/2)^j on the cyclic space.
transfermatrices(L, M) =
{ my(N = necklaces(L, M), where = Map(), D = #N, T = vector(L + 1, j, matrix(#N, #N)));
  for (i = 1, D, mapput(~where, N[i], i));
  for (n = 1, D, my(row = transferrow(N[n], L, where, D));
    for (m = 1, D, for (j = 1, L + 1, T[j][m, n] = row[m][j])));
  T };
atpoint(T, a) = sum(j = 1, #T, a^(j - 1) * T[j]);

\\ Orbits: list of [f, c] with f the irreducible polynomial (in k) of the eigenvalue of T(v0) and c the
\\ coefficients of the eigenvalue T(v) in powers of v, as polynomials in k modulo f.
orbits(L, M) =
{ my(T = transfermatrices(L, M), U = transfermatrices(L, M - 1), A, B, P, F, a = 2, found = List());
  my(count = #T[1] - #U[1]);
  if (count == 0, return ([]));
  while (1,
    A = atpoint(T, a); B = atpoint(U, a);
    P = charpoly(A, 'k) / charpoly(B, 'k);
    if (poldegree(P) != count, error("primaries lost"));
    if (issquarefree(P) && poldegree(gcd(P, charpoly(B, 'k))) <= 0, break);
    a++);
  F = factor(P)[, 1];
  my(whole = charpoly(A, 'k));
  for (i = 1, #F,
    my(f = F[i], d = poldegree(f), rest = whole / f, w, u, K, R, tries = 1);
    while (1,
      w = vectorv(#A, j, if (j == tries, 1, 0)); u = 0 * w;
      forstep (j = poldegree(rest), 0, -1, u = A * u + polcoef(rest, j) * w);
      if (u != 0, break); tries++);
    K = matrix(#A, d); R = u;
    for (j = 1, d, K[, j] = R; R = A * R);
    my(Tv = 0);
    for (j = 1, L + 1, my(c = matsolve(matid(d), leftsolve(K, T[j] * u))); Tv += sum(m = 1, d, c[m] * 'k^(m - 1)) * (x - 1/2)^(j - 1));
    listput(found, [f, vector(L + 1, j, polcoef(Tv, j - 1))]));
  Vec(found) };
leftsolve(K, b) = { my(S = matinverseimage(K, b)); if (#S == 0, error("eigenvalue outside its orbit")); S };

\\ gamma_1 = -2 d/dv log[T(v)/(v+1/2)^L] at v = 1/2.
gammaone(T, L) = { my(p = Polrev(T, x)); -2 * (subst(deriv(p, x), x, 1/2) / subst(p, x, 1/2) - L) };
mirror(T, L) = vector(L + 1, j, (-1)^(L - j + 1) * T[j]);

\\ Choice of generator. Returns [g, T over Q[k]/g, omega, minimal polynomial of omega, paired, name]:
\\ Q[k]/g is the field of T(v); for a symmetric orbit k = omega, for a pair a small generator.
choosefield(f, T, L) =
{ my(Tk = vector(L + 1, j, Mod(T[j], f)), omega = gammaone(Tk, L), name = "gamma_1", m, e, paired, g, back);
  paired = Tk != mirror(Tk, L);
  e = minpoly(evencharge(Tk, L), 'k); m = minpoly(omega, 'k);
  if (poldegree(m) < poldegree(e), omega = evencharge(Tk, L); m = e; name = "even charge");
  if (poldegree(m) == poldegree(f),
    g = m; back = if (poldegree(f) == 1, Mod(-polcoef(f, 0), g), modreverse(omega))
  ,
    my(reduced = polredbest(f, 1)); g = reduced[1]; back = reduced[2]);
  \\ back is the old generator in terms of the new one
  my(move = c -> subst(c, 'k, back) * Mod(1, g));
  [g, vector(L + 1, j, move(T[j])), move(lift(omega)), m, paired, name] };
\\ a generic combination of the charges that are even under v -> -v
evencharge(T, L) = { my(S = T + mirror(T, L), e = 0); for (j = 1, L - 1, e += 3^j * S[j]); e };

\\ ---------------------------------------------------------------- one-loop Baxter pair
\\ T Q = (v+1/2)^L Q(v-1) + (v-1/2)^L Q(v+1), from the top coefficient down.
baxter(T, L, degree, skip) =
{ my(p = Polrev(T, x), left = (x + 1/2)^L, right = (x - 1/2)^L, Q = x^degree, rest, image = n -> left * (x - 1)^n + right * (x + 1)^n - p * x^n);
  rest = image(degree);
  forstep (n = degree - 1, 0, -1,
    my(top = polcoef(rest, L + n - 2), e, c);
    if (n == skip, if (top != 0, error("second solution is not polynomial")); next);
    e = image(n); c = -top / polcoef(e, L + n - 2);
    Q += c * x^n; rest += c * e);
  if (rest != 0, error("Baxter equation has no polynomial solution"));
  Q };

\\ ---------------------------------------------------------------- series in h, order by order
\\ A series is a vector: entry n+1 is the coefficient of h^n.
conv(a, b, n) = { my(r = 0); for (i = 0, n, my(p = a[i + 1], q = b[n - i + 1]); if (p != 0 && q != 0, r += p * q)); r };
\\ [h^n] of a polynomial with coefficients P[j] (j-1 = power, each a series) at the point shift + c.
\\ H is the table of Horner partial sums, filled one order at a time.
horner(P, H, shift, c, n) =
{ my(d = #P);
  H[d][n + 1] = P[d][n + 1];
  forstep (j = d - 1, 1, -1, H[j][n + 1] = P[j][n + 1] + shift * H[j + 1][n + 1] + conv(c, H[j + 1], n));
  H };

\\ y_{r,i}: Y^{-r} = sum_i y_{r,i} h^i w^{-r-2i}
ycoefficient(r, i) = if (i == 0, 1, (-1)^i * r * binomial(r + 2*i - 1, i - 1) / i);

\\ Dressing coefficient C_{rs} at h^n (BES, VV).
dressing(r, s, n) =
{ my(m = n - r - s);
  if (m < 0, return (0));
  2 * (-1)^((s - r - 1) / 2 + m) * (r + s + 2*m)! * (r + s + 2*m - 1)! / (m! * (r + m)! * (s + m)! * (r + s + m)!)
    * z[(r + s + 2*m - 1) / 2] };

\\ [w^i] of a polynomial around the point p
around(Q, p) = subst(Q, x, x + p);

\\ Lift: returns the vector gamma_1 .. gamma_L (asymptotic at h^L).
liftpair(L, M, Q1zero, Q2zero, singular) =
{ my(top = L - 1, factor0 = 2*M - L - 1);
  my(q = vector(M + 1, j, vector(L)), Q1 = vector(L), Q2 = vector(L));
  my(W = vector(L + 1, j, vector(L)), E = vector(L), D = vector(L), P = vector(L, r, vector(L)));
  \\ p_n and the linear system
  my(p = vector(L + 1), h = 'h);
  p[1] = [1]; p[2] = [x];
  my(pp = 2, pc = x);
  for (n = 2, L, my(pn = x * pc + 'y * pp); pp = pc; pc = pn; p[n + 1] = vector(n\2 + 1, i, polcoef(pn, i - 1, 'y)));
  my(A = matrix(L, L), inverse);
  my(plus1 = around(Q1zero, 1/2), minus1 = around(Q1zero, -1/2), plus2 = around(Q2zero, 1/2), minus2 = around(Q2zero, -1/2));
  my(powers2 = concat([0 .. M - 1], [M + 1 .. L - M]));
  if (L - M + 1 != M + 1 && M > L - M, error("M > L/2"));
  powers2 = select(n -> n != M, [0 .. L - M]);
  for (n = 0, M - 1, my(e = (x + 1/2)^n * minus2 - (x - 1/2)^n * plus2); for (i = 0, L - 1, A[i + 1, n + 1] = polcoef(e, i)));
  for (n = 1, #powers2, my(e = plus1 * (x - 1/2)^powers2[n] - minus1 * (x + 1/2)^powers2[n]); for (i = 0, L - 1, A[i + 1, M + n] = polcoef(e, i)));
  inverse = A^(-1);
  \\ logarithmic derivatives
  my(length0 = 2*L, reg = vector(2, i, vector(M + 1 - singular, j, vector(L))), c = vector(2, i, vector(L)), Dlog = vector(2, i, vector(L)), inv0 = vector(2), loc = vector(2, i, vector(L)));
  my(point = [1/2, -1/2], slope = vector(2, i, subst(deriv(Q1zero, x), x, point[i])));
  \\ singular tables
  my(HN = vector(M + 1, j, vector(L)), HW = vector(L + 1, j, vector(L)), HR = vector(M, j, vector(L)), G = vector(L), den = vector(L), Fc = vector(L + 1, j, vector(L)), wk = vector(L + 1, j, vector(L)));
  for (n = 0, top,
    \\ ---- potential at order n
    if (n == 0, E[1] = 1,
      my(d = 0);
      for (r = 1, n, forstep (s2 = r + 1, n - r, 2,
        for (i = r + s2, n, my(C = dressing(r, s2, i) * 2 * (-1)^((r + s2 - 1) / 2));
          d += C * (P[s2][n - i + 1] * 'y^r - P[r][n - i + 1] * 'y^s2))));
      D[n + 1] = d;
      my(e = 0); for (i = 1, n, if (D[i + 1] != 0, e += i * D[i + 1] * E[n - i + 1]));
      E[n + 1] = truncate0(e / n, L));
    for (j = 0, L, wk[L - j + 1][n + 1] = polcoef(E[n + 1], j, 'y));
    my(w = 0);
    for (j = 0, L, for (i = 0, n, if (i < #p[j + 1] && wk[j + 1][n - i + 1] != 0, w += wk[j + 1][n - i + 1] * p[j + 1][i + 1])));
    for (j = 0, L, W[j + 1][n + 1] = polcoef(w, j, x));
    \\ ---- pair at order n
    if (n == 0, Q1[1] = Q1zero; Q2[1] = Q2zero,
      my(rhs = factor0 * w);
      for (i = 1, n - 1, rhs -= plusQ1[i + 1] * minusQ2[n - i + 1] - minusQ1[i + 1] * plusQ2[n - i + 1]);
      my(sol = inverse * vectorv(L, i, polcoef(rhs, i - 1, x)));
      Q1[n + 1] = sum(i = 1, M, sol[i] * x^(i - 1)); Q2[n + 1] = sum(i = 1, #powers2, sol[M + i] * x^powers2[i]));
    if (n == 0, plusQ1 = vector(L); minusQ1 = vector(L); plusQ2 = vector(L); minusQ2 = vector(L));
    plusQ1[n + 1] = around(Q1[n + 1], 1/2); minusQ1[n + 1] = around(Q1[n + 1], -1/2);
    plusQ2[n + 1] = around(Q2[n + 1], 1/2); minusQ2[n + 1] = around(Q2[n + 1], -1/2);
    for (j = 1, M + 1, q[j][n + 1] = polcoef(Q1[n + 1], j - 1, x));
    \\ ---- regular part near +1/2 (i = 1) and -1/2 (i = 2)
    for (i = 1, 2,
      if (!singular, for (j = 1, M + 1, reg[i][j][n + 1] = q[j][n + 1]),
        \\ divide by (v - point - c): synthetic division, c_n from the remainder
        my(b = vector(M + 2, j, 0), shift);
        reg[i][M][n + 1] = q[M + 1][n + 1];
        forstep (j = M, 2, -1, reg[i][j - 1][n + 1] = q[j][n + 1] + point[i] * reg[i][j][n + 1] + conv(c[i], reg[i][j], n));
        my(rem = q[1][n + 1] + point[i] * reg[i][1][n + 1] + conv(c[i], reg[i][1], n));
        if (n == 0, if (rem != 0, error("root at 1/2 expected")),
          my(cn = -rem / slope[i], u = 0);
          c[i][n + 1] = cn;
          forstep (j = M, 2, -1, u = point[i] * u + cn * reg[i][j][1]; reg[i][j - 1][n + 1] += u)));
      my(R = sum(j = 1, #reg[i], reg[i][j][n + 1] * x^(j - 1)));
      loc[i][n + 1] = Vecrev(around(R, point[i]), M + 1);
      my(m = 2*L - 2*n);                        \\ powers of w needed at this order
      if (n == 0, inv0[i] = Vec(1 / (Ser(loc[i][1], x, m)), m));
      \\ D_n = (R'_n - sum_k R_k D_{n-k}) / R_0
      my(num = vector(m, e, if (e <= M, e * loc[i][n + 1][e + 1], 0)));
      for (a = 1, n, my(Ra = loc[i][a + 1], Db = Dlog[i][n - a + 1]);
        for (e1 = 1, M + 1, if (Ra[e1] != 0, for (e2 = 1, m - e1 + 1, num[e1 + e2 - 1] -= Ra[e1] * Db[e2]))));
      Dlog[i][n + 1] = vector(m, e, sum(a = 1, e, inv0[i][a] * num[e - a + 1])));
    \\ ---- charges at order n: P_r = sum_i y_{r,i} h^i (S+ - S-), only those that are needed
    if (singular,
      HN = horner(q, HN, 3/2, c[1], n); HW = horner(W, HW, 1, c[1], n); HR = horner(reg[2], HR, -1/2, c[1], n);
      den[n + 1] = conv(HW[1], HR[1], n);
      my(g = HN[1][n + 1]); for (a = 1, n, g -= den[a + 1] * G[n - a + 1]);
      G[n + 1] = g / den[1];
      Fc[1][n + 1] = 0; Fc[2][n + 1] = (n == 0);
      for (m = 2, L, Fc[m + 1][n + 1] = conv(c[1], Fc[m], n) + if (n > 0, Fc[m - 1][n], 0)));
    for (r = 1, max(1, L - 2),
      if (r > 1 && n + r + if (r % 2, 2, 1) > L - 1, next);     \\ beyond the dressing orders needed
      my(value = 0);
      for (i = 0, n, my(m = r + 2*i); value += ycoefficient(r, i) * (Dlog[1][n - i + 1][m] - Dlog[2][n - i + 1][m]));
      if (singular,
        my(series = vector(n + 1, a, my(o = a - 1, sm = 0); for (kk = r + 1, L, sm += conv(wk[kk + 1], Fc[kk - r + 1], o)); sm));
        value -= r * conv(G, series, n));
      P[r][n + 1] = value));
  vector(L, n, 2 * P[1][n]) };
truncate0(e, L) = { if (poldegree(e, 'y) <= L, e, sum(j = 0, L, polcoef(e, j, 'y) * 'y^j)) };

\\ ---------------------------------------------------------------- finite-size term at h^L
\\ T(s,t) with twist: second term times a, third term times b = 1/a.
mirrortransfer(Q, a, b) =
{ my(sm = subst(Q, x, s - 1/2), sp = subst(Q, x, s + 1/2), tm = subst(Q, x, t - 1/2), tp = subst(Q, x, t + 1/2));
  (s - t + 1) * sm * tp - a * (s - t) * sp * tp - b * (s - t) * tm * sm + (s - t - 1) * sp * tm };

\\ matrix of coefficients of s^i t^j of a polynomial in s, t, degrees below n
grid(N, n) = matrix(n, n, i, j, polcoef(polcoef(N, i - 1, s), j - 1, t));

\\ 1/p as power series in its variable, n terms, p given by coefficient vector
inverseseries(p, n) =
{ my(r = vector(n), b = 1 / p[1]);
  r[1] = b;
  for (i = 2, n, my(e = 0); for (j = 1, min(i - 1, #p - 1), e += p[j + 1] * r[i - j]); r[i] = -e * b);
  r };

\\ The finite-size sum for a one-loop Baxter polynomial Q; [constant, vector of zeta(2i+1) coefficients].
finitesize(L, M, Q, TL, TR) =
{ my(n = L, N = TL * TR, deg = 2 * (2*M + 1) + 1, Ng, a, conv2, H);
  my(pm = subst(Q, x, x - 1/2), pp = subst(Q, x, x + 1/2), A = inverseseries(Vecrev(pm * pp), n));
  Ng = grid(N, n);
  my(toep = matrix(n, n, i, j, if (i >= j, A[i - j + 1], 0)));
  H = toep * Ng * toep~;
  my(zeta = vector(2*L - 1));
  for (i = 0, L - 1, for (j = 0, L - 1, my(kk = 2*L - 1 - i - j); zeta[kk] += 2 * (-1)^L * binomial(i - L, L - 1 - j) * H[i + 1, j + 1]));
  \\ constant: r(s,t) = N [s^L Q(s+1/2)]^{-1} mod Q(s-1/2), degree in s below M
  my(B = compan(pm, M), Bs = B^0, val, invs);
  val = evalmat(pp, B) * B^L;
  \\ column vectors: coefficients in s of the residue class
  my(Nr = 0, big = 2 * (2*M + 1), full = matrix(big + 1, big + 1, i, j, polcoef(polcoef(N, i - 1, s), j - 1, t)));
  my(e = vectorv(M, i, i == 1), red = matrix(M, big + 1));
  for (i = 0, big, red[, i + 1] = e; e = B * e);
  my(r = matsolve(val, red * full));          \\ M x (big+1): coefficients of s^i t^j
  my(rt = 0); for (i = 1, M, rt += (1 + x)^(i - 1) * Polrev(r[i, ], x));
  my(iq = inverseseries(Vecrev(pp * pp * pm), L), cst = 0);
  for (i = 0, L - 1, cst += polcoef(rt, i, x) * iq[L - i]);
  [2 * (-1)^L * cst, zeta] };
compan(p, M) = { my(l = polcoef(p, M)); matrix(M, M, i, j, if (j < M, i == j + 1, -polcoef(p, i - 1) / l)) };
evalmat(p, B) = { my(r = 0 * B, one = B^0); forstep (j = poldegree(p), 0, -1, r = r * B + polcoef(p, j) * one); r };

collectzeta(w, L) =
{ forstep (kk = 2, 2*L - 1, 2, if (kk <= #w[2] && w[2][kk] != 0, error("even zeta value survives")));
  if (w[2][1] != 0, error("zeta(1) survives"));
  w[1] + sum(i = 1, L - 1, w[2][2*i + 1] * z[i]) };

wrappingregular(L, M, Q) = { my(T = mirrortransfer(Q, 1, 1)); collectzeta(finitesize(L, M, Q, T, T), L) };

\\ Twisted one-loop solution of a singular state, Q = (v-1/2-c)(v+1/2-c-d) R(v), d = c^L G, as series
\\ in tau (twist 1 + tau) to the given number of terms. Each round with the fixed Jacobian gains one order.
twistedequations(L, M, c, G, R, kappa) =
{ my(d = c^L * G, Q, e, at = p -> subst(R, x, p));
  Q = (x - 1/2 - c) * (x + 1/2 - c - d) * R;
  e = kappa * (x + 1/2)^L * subst(Q, x, x - 1) + (x - 1/2)^L * subst(Q, x, x + 1);
  my(rest = vectorv(poldegree(e, x) + 1, i, polcoef(e, i - 1, x)), m = M - 2);
  forstep (i = #rest, m + 1, -1, for (j = 0, m - 1, rest[i - m + j] -= rest[i] * polcoef(R, j, x)));
  concat([kappa * (1 + c)^L * G * at(c - 1/2) + (2 - d) * at(c + 3/2),
    (c + d - 1)^L * G * at(c + d + 1/2) + kappa * (1 + c^(L - 1) * G)^L * (2 - d) * at(c + d - 3/2)]~, vectorv(m, i, rest[i])) };

twistedpair(L, M, Qzero, terms) =
{ my(R0 = Qzero / (x^2 - 1/4), m = M - 2, X, J, one = Mod(1, polcoef(Qzero, 0 + M % 2).mod), eq);
  eq = ((X, kappa) -> twistedequations(L, M, X[1], X[2], sum(i = 1, m, X[i + 2] * x^(i - 1)) + one * x^m, kappa));
  X = concat([0 * one, -2 * subst(R0, x, 3/2) / subst(R0, x, -1/2)]~, vectorv(m, i, polcoef(R0, i - 1)));
  J = matrix(M, M);
  for (j = 1, M, my(Y = X + O(tau^2) * vectorv(M, i, 1)); Y[j] += tau; my(F = eq(Y, 1 + O(tau^2))); for (i = 1, M, J[i, j] = polcoef(F[i], 1, tau)));
  J = J^(-1);
  for (n = 1, terms - 1,
    my(F = eq(X + O(tau^(n + 1)) * vectorv(M, i, 1), (1 + tau + O(tau^(n + 1)))^L));
    X -= J * vectorv(M, i, polcoef(F[i], n, tau)) * tau^n);
  X += O(tau^terms) * vectorv(M, i, 1);
  my(c = X[1], G = X[2], d = c^L * G);
  [(x - 1/2 - c) * (x + 1/2 - c - d) * (sum(i = 1, m, X[i + 2] * x^(i - 1)) + one * x^m), c, G] };

\\ b_L = [h^(L-1)] Y^(2L-1) (1/s^2 + 1/s^3) at w = 1
twistconstant(L) = { my(root = sqrt(1 + 4*tau + O(tau^(L + 1)))); polcoef(((1 + root) / 2)^(2*L - 1) * (1 / root^2 + 1 / root^3), L - 1) };

\\ What is added to the asymptotic coefficient for a singular state: the twist limit.
wrappingsingular(L, M, Q) =
{ my(terms = 3*L + 1, pair, c, G, rho, w, value);
  while (1,
    pair = twistedpair(L, M, Q, terms); c = pair[2]; G = pair[3];
    rho = 1 + tau + O(tau^terms);
    my(zl = rho^(-M), zr = rho^(-(L - M)));
    w = finitesize(L, M, pair[1], mirrortransfer(pair[1], zl, 1 / zl), mirrortransfer(pair[1], zr, 1 / zr));
    w[1] += 2 * (-1)^L * G / c^L + twistconstant(L) * G^2 / c;
    value = vector(2*L, i, if (i == 1, w[1], w[2][i - 1]));
    if (#select(e -> type(e) == "t_SER" && serprec(e, tau) < 1, value) == 0, break);
    terms += L);
  for (i = 1, 2*L, if (value[i] != 0 && valuation(value[i], tau) < 0, error("a negative power of the twist survives")));
  value = vector(2*L, i, polcoef(value[i], 0, tau));
  collectzeta([value[1], value[2..2*L]], L) };

\\ ---------------------------------------------------------------- output
\\ An element of K[z3, z5, ...] as terms [zeta arguments, coefficients in powers of omega].
terms(e, i, one) =
{ my(v, r = List());
  if (i == 0, return (if (e == 0, [], [[[], e * one]])));
  v = variable(z[i]);
  for (j = 0, poldegree(e, v), my(a = polcoef(e, j, v)); if (a != 0,
    foreach (terms(a, i - 1, one), w, listput(r, [concat(w[1], vector(j, n, 2*i + 1)), w[2]]))));
  Vec(r) };
quote(v) = Str("[", strjoin(apply(e -> Str("\"", e, "\""), v), ","), "]");
\\ powers of omega inside K, for pairs
inomega(a, omega, basis, d) = { my(n = poldegree(a.mod), c = matinverseimage(basis, vectorv(n, i, polcoef(lift(a), i - 1)))); if (#c == 0, error("coefficient outside the field of omega")); c~ };
printterms(e, omega, basis, d, L) =
{ my(list = terms(e, L, Mod(1, omega.mod)));
  list = vecsort(list, (p, q) -> if (#p[1] != #q[1], sign(#p[1] - #q[1]), lex(p[1], q[1])));
  Str("[", strjoin(apply(w -> Str("{\"zeta\":", strjoin(strsplit(Str(w[1]), " "), ""), ",\"value\":", quote(inomega(w[2], omega, basis, d)), "}"), list), ","), "]") };

\\ Everything about one orbit: [key for sorting, text].
oneorbit(L, M, f, T, wrapping) =
{ my(field = choosefield(f, T, L), g = field[1], omega = field[3], m = field[4], d = poldegree(m), n = poldegree(g), Q1, Q2, singular, gamma, basis, W, tm = getabstime());
  Q1 = baxter(field[2], L, M, -1); Q2 = baxter(field[2], L, L - M + 1, M);
  singular = subst(Q1, x, 1/2) == 0;
  gamma = liftpair(L, M, Q1, Q2, singular);
  if (timing, warning("lift ", L, ",", M, " degree ", n, ": ", getabstime() - tm, " ms")); tm = getabstime();
  basis = matrix(n, d, i, j, polcoef(lift(omega^(j - 1)), i - 1));
  if (wrapping, W = if (singular, wrappingsingular(L, M, Q1), wrappingregular(L, M, Q1)));
  if (timing, warning("finite size ", L, ",", M, " degree ", n, ": ", getabstime() - tm, " ms"));
  my(text = Str("{\"parity\":\"", if (field[5], "paired", "symmetric"), "\",\"members\":", if (field[5], 2*d, d), ",\"singular\":", if (singular, "true", "false"),
    ",\"generator\":\"", field[6], "\",\"minimal_polynomial\":", quote(Vecrev(m)), ",\"gamma\":[\n  ",
    strjoin(apply(e -> printterms(e, omega, basis, d, L), gamma), ",\n  "), "]",
    if (wrapping, Str(",\n \"finite_size\":", printterms(W, omega, basis, d, L)), ""), "}"));
  [concat([poldegree(m), field[5]], Vec(m)), text] };
timing = 0;

\\ The whole family as JSON. gamma[n] for n = 1 .. L, the last one asymptotic; finite_size is what
\\ completes gamma[L]. Through loop L - 1 only: series(L, M, 0).
series(L, M, wrapping = 1) =
{ my(found = orbits(L, M), seen = List(), list = List(), skip);
  for (i = 1, #found,
    my(f = found[i][1], T = found[i][2], Tm = mirror(T, L), P = minpoly(Mod(subst(Polrev(T, x), x, 5/2), f), 'k), Pm = minpoly(Mod(subst(Polrev(Tm, x), x, 5/2), f), 'k));
    \\ of two orbits that are mirror images of each other only the first is kept
    if (#select(q -> q == P, seen), next);
    if (P != Pm, listput(seen, Pm));
    listput(list, oneorbit(L, M, f, T, wrapping)));
  list = vecsort(Vec(list), (a, b) -> lex(a[1], b[1]));
  print("{\"length\":", L, ",\"magnons\":", M, ",\"orbits\":[\n", strjoin(apply(o -> o[2], list), ",\n"), "\n]}") };
