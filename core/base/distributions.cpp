#include "core/base/distributions.hpp"

#include <algorithm>
#include <cmath>

#include <boost/math/distributions/fisher_f.hpp>
#include <boost/math/distributions/normal.hpp>
#include <boost/math/distributions/students_t.hpp>
#include <boost/math/special_functions/beta.hpp>
#include <boost/math/special_functions/gamma.hpp>
#include <boost/math/special_functions/trigamma.hpp>

namespace agreed {
namespace {
namespace bm = boost::math;

// The normal tail beyond this is no normal double (2.2e-308).
constexpr double kLargestScore = 37.5;

// Boost computes in long double unless told otherwise: seven times slower, for digits nobody uses.
using InDouble = bm::policies::policy<bm::policies::promote_double<false>>;
using Normal = bm::normal_distribution<double, InDouble>;
using StudentT = bm::students_t_distribution<double, InDouble>;
using FisherF = bm::fisher_f_distribution<double, InDouble>;

const Normal kNormal;
}  // namespace

double normal_cdf(double z) {
  return bm::cdf(kNormal, z);
}
double normal_tail(double z) {
  return bm::cdf(bm::complement(kNormal, z));
}
double normal_quantile_of_tail(double p) {
  return bm::quantile(bm::complement(kNormal, p));
}

double t_tail(double t, double df) {
  return bm::cdf(bm::complement(StudentT(df), t));
}
double t_quantile_of_tail(double p, double df) {
  return bm::quantile(bm::complement(StudentT(df), p));
}

double f_tail(double f, double df1, double df2) {
  return bm::cdf(bm::complement(FisherF(df1, df2), f));
}
double f_quantile(double p, double df1, double df2) {
  return bm::quantile(FisherF(df1, df2), p);
}

double beta_quantile(double p, double a, double b) {
  return bm::ibeta_inv(a, b, p, InDouble());
}
double gamma_half_step(double x) {
  return 1 / bm::tgamma_delta_ratio(x, 0.5, InDouble());
}
double log_gamma(double x) {
  return bm::lgamma(x, InDouble());
}
double trigamma(double x) {
  return bm::trigamma(x, InDouble());
}

double normal_score_of_tail(double tail) {
  if (tail < normal_tail(kLargestScore)) return kLargestScore;
  if (tail > normal_cdf(kLargestScore)) return -kLargestScore;
  return normal_quantile_of_tail(tail);
}

double normal_score_of_t(double t, double df) {
  const double score = normal_score_of_tail(t_tail(std::abs(t), df));
  return std::copysign(score, t);
}

double t_of_normal_score(double h, double df) {
  return t_quantile_of_tail(normal_tail(h), df);
}

}  // namespace agreed
