// SPDX-License-Identifier: GPL-3.0-or-later
// model.stan: every case as one Stan program, so that it is compiled once: curve, endpoint and priors
// are data. Unknowns are moved to the whole line by hand, with their Jacobians, because their bounds
// are data too.
functions {
  // Up to a constant. Families: 1 normal, 2 half_normal, 3 lognormal, 4 gamma, 5 inverse_gamma,
  // 6 uniform, 7 student_t (df, location, scale).
  real log_prior(real x, int family, vector a) {
    if (family == 1) return normal_lpdf(x | a[1], a[2]);
    if (family == 2) return normal_lpdf(x | 0, a[1]);
    if (family == 3) return lognormal_lpdf(x | a[1], a[2]);
    if (family == 4) return gamma_lpdf(x | a[1], a[2]);
    if (family == 5) return inv_gamma_lpdf(x | a[1], a[2]);
    if (family == 6) return 0;
    return student_t_lpdf(x | a[1], a[2], a[3]);
  }
  // Curves: 1 linear, 2 log_linear, 3 quadratic, 4 exponential, 5 emax, 6 sigmoid_emax, 7 logistic.
  real curve_at(real d, int curve, vector x, real top, real shift) {
    if (curve == 1) return x[1] + x[2] * d;
    if (curve == 2) return x[1] + x[2] * log(d + shift);
    if (curve == 3) return x[1] + x[2] * d / top + x[3] * square(d / top);
    if (curve == 4) return x[1] + x[2] * expm1(d / x[3]);
    if (curve == 5) return x[1] + x[2] * d / (x[3] + d);
    if (curve == 6) return d == 0 ? x[1] : x[1] + x[2] / (1 + pow(x[3] / d, x[4]));
    return x[1] + x[2] * inv_logit((d - x[3]) / x[4]);
  }
}
data {
  int<lower=1> P;               // unknowns with a prior: those of the curve, [control], [sd]
  int family[P];
  vector[3] arg[P];
  vector[P] low;
  vector[P] high;
  int<lower=2> K;
  vector[K] d;
  int curve;                    // as above; 8 walk, 9 independent
  int order;
  vector[K] gap;                // of the step up to a level, relative
  real shift;
  int<lower=0, upper=1> off;    // the first level is not on the curve
  int control_at;
  int sd_at;
  int sd_is_variance;
  int drift_at;
  int drift_is_variance;
  int<lower=0> Z;               // standard normal steps of a walk
  int<lower=0, upper=1> binary;
  int<lower=0> N;
  vector[N] y;
  int level[N];
  int events[K];
  int n;
}
parameters {
  vector[P] u;
  vector[Z] z;
}
transformed parameters {
  vector[P] x;
  vector[K] mu;
  real jacobian = 0;
  for (p in 1:P) {
    if (low[p] > negative_infinity() && high[p] < positive_infinity()) {
      x[p] = low[p] + (high[p] - low[p]) * inv_logit(u[p]);
      jacobian += log_inv_logit(u[p]) + log1m_inv_logit(u[p]);
    } else if (low[p] > negative_infinity()) {
      x[p] = low[p] + exp(u[p]);
      jacobian += u[p];
    } else if (high[p] < positive_infinity()) {
      x[p] = high[p] - exp(u[p]);
      jacobian += u[p];
    } else
      x[p] = u[p];
  }
  if (off) mu[1] = x[control_at];
  if (curve == 8) {
    real drift = drift_is_variance ? sqrt(x[drift_at]) : x[drift_at];
    mu[off + 1] = x[1];
    if (order == 2) mu[off + 2] = x[1] + x[2];
    for (k in (off + order + 1):K) {
      real jump = drift * z[k - off - order];
      mu[k] = order == 2 ? 2 * mu[k - 1] - mu[k - 2] + jump : mu[k - 1] + sqrt(gap[k]) * jump;
    }
  } else if (curve == 9) {
    for (k in (off + 1):K) mu[k] = x[k - off];
  } else {
    for (k in (off + 1):K) mu[k] = curve_at(d[k], curve, x, max(d), shift);
  }
}
model {
  for (p in 1:P) target += log_prior(x[p], family[p], arg[p]);
  target += jacobian;
  z ~ normal(0, 1);
  if (binary) events ~ binomial_logit(n, mu);
  else y ~ normal(mu[level], sd_is_variance ? sqrt(x[sd_at]) : x[sd_at]);
}
