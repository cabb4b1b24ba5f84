#include "estimator/moments.hpp"

namespace sagitta::estimator {

void Moments::add(double value) noexcept {
    ++n;
    const double delta = value - mean;
    mean += delta / static_cast<double>(n);
    m2 += delta * (value - mean);
}

void Moments::merge(const Moments& other) noexcept {
    if (other.n == 0) {
        return;
    }
    const double own_n = static_cast<double>(n);
    const double other_n = static_cast<double>(other.n);
    const double total = own_n + other_n;
    const double delta = other.mean - mean;
    m2 += other.m2 + delta * delta * (own_n * other_n / total);
    mean += delta * (other_n / total);
    n += other.n;
}

double Moments::variance() const noexcept {
    return m2 / static_cast<double>(n - 1);
}

void PairMoments::add(double x, double y) noexcept {
    ++n;
    const double count = static_cast<double>(n);
    const double delta_x = x - mean_x;
    const double delta_y = y - mean_y;
    mean_x += delta_x / count;
    mean_y += delta_y / count;
    m2_x += delta_x * (x - mean_x);
    m2_y += delta_y * (y - mean_y);
    m_xy += delta_x * (y - mean_y);
}

void PairMoments::merge(const PairMoments& other) noexcept {
    if (other.n == 0) {
        return;
    }
    const double own_n = static_cast<double>(n);
    const double other_n = static_cast<double>(other.n);
    const double total = own_n + other_n;
    const double delta_x = other.mean_x - mean_x;
    const double delta_y = other.mean_y - mean_y;
    const double weight = own_n * other_n / total;
    m2_x += other.m2_x + delta_x * delta_x * weight;
    m2_y += other.m2_y + delta_y * delta_y * weight;
    m_xy += other.m_xy + delta_x * delta_y * weight;
    mean_x += delta_x * (other_n / total);
    mean_y += delta_y * (other_n / total);
    n += other.n;
}

} // namespace sagitta::estimator
