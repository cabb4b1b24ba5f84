#include "truth_statistics.hpp"

#include "estimator/moments.hpp"

#include <algorithm>
#include <cmath>
#include <numeric>
#include <vector>

namespace sagitta::bench {
namespace {

std::vector<double> ranks(std::span<const double> values) {
    std::vector<std::size_t> order(values.size());
    std::iota(order.begin(), order.end(), std::size_t{0});
    std::sort(order.begin(), order.end(),
              [values](std::size_t a, std::size_t b) { return values[a] < values[b]; });
    std::vector<double> rank(values.size());
    for (std::size_t i = 0; i < order.size();) {
        std::size_t end = i + 1;
        while (end < order.size() && values[order[end]] == values[order[i]]) {
            ++end;
        }
        const double mean = 0.5 * static_cast<double>(i + end - 1);
        for (; i < end; ++i) {
            rank[order[i]] = mean;
        }
    }
    return rank;
}

} // namespace

double correlation(std::span<const double> x, std::span<const double> y) {
    estimator::PairMoments pair;
    for (std::size_t i = 0; i < x.size(); ++i) {
        pair.add(x[i], y[i]);
    }
    const double scale = std::sqrt(pair.m2_x * pair.m2_y);
    return scale > 0.0 ? pair.m_xy / scale : 0.0;
}

double rank_correlation(std::span<const double> x, std::span<const double> y) {
    return correlation(ranks(x), ranks(y));
}

} // namespace sagitta::bench
