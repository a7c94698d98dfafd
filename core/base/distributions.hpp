#pragma once
// Distribution functions and quantiles, each to about 1e-12 relative; Boost.Math does the work. Tails are
// asked for as tails, never as 1 - p, so that small ones keep their digits. Arguments out of range throw
// std::domain_error.

namespace agreed {

/// P(Z <= z).
[[nodiscard]] double normal_cdf(double z);
/// P(Z > z).
[[nodiscard]] double normal_tail(double z);
/// z with P(Z > z) = p, 0 < p < 1.
[[nodiscard]] double normal_quantile_of_tail(double p);

/// P(T > t) on `df` degrees of freedom.
[[nodiscard]] double t_tail(double t, double df);
/// t with P(T > t) = p.
[[nodiscard]] double t_quantile_of_tail(double p, double df);
/// P(F > f).
[[nodiscard]] double f_tail(double f, double df1, double df2);
/// f with P(F <= f) = p.
[[nodiscard]] double f_quantile(double p, double df1, double df2);
/// x with I_x(a, b) = p.
[[nodiscard]] double beta_quantile(double p, double a, double b);
/// Gamma(x + 1/2) / Gamma(x), x > 0.
[[nodiscard]] double gamma_half_step(double x);
/// ln Gamma(x), x > 0.
[[nodiscard]] double log_gamma(double x);
/// Second derivative of ln Gamma, x > 0.
[[nodiscard]] double trigamma(double x);

/// The z whose normal tail equals the t tail of `t` (any sign): the normal score of a t statistic. Finite for
/// every finite t: where the tail underflows, the largest score a double tail can give (about 37.5).
[[nodiscard]] double normal_score_of_t(double t, double df);
/// The t >= 0 whose normal score is h >= 0.
[[nodiscard]] double t_of_normal_score(double h, double df);
/// The z whose normal tail is `tail`, 0 <= tail <= 1, held within +-37.5.
[[nodiscard]] double normal_score_of_tail(double tail);

}  // namespace agreed
