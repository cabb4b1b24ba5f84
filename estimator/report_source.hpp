// The one interface behind which live pointers, recordings and the simulated hand stand.
#pragma once

#include "estimator/pointer.hpp"
#include "estimator/report.hpp"
#include "estimator/result.hpp"

#include <span>

namespace sagitta::estimator {

class ReportSource {
public:
    ReportSource() = default;
    ReportSource(const ReportSource&) = delete;
    ReportSource& operator=(const ReportSource&) = delete;
    virtual ~ReportSource() = default;

    /// Replaces the content of `batch` with the next reports, oldest first over all pointers.
    /// An empty batch means: a recording or a simulated hand has ended, a live source has nothing
    /// to read now. Never blocks.
    /// @return the source's error when it cannot go on; reports delivered earlier stay valid.
    [[nodiscard]] virtual Result<void> next(ReportBatch& batch) = 0;

    /// The pointers seen so far, by PointerIndex. Grows only inside next().
    [[nodiscard]] virtual std::span<const PointerDescription> pointers() const = 0;
};

} // namespace sagitta::estimator
