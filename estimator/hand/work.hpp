// What a hand does at a desk between two pauses: one activity at a time, as reports.
#pragma once

#include "estimator/hand/desk.hpp"

namespace sagitta::estimator::hand {

/// The hand of one session with one pointer.
class Work {
public:
    struct Done {
        PointerTime end;
        bool pauses; ///< false: the activity goes on with the next call
    };

    /// @param plan, device  outlive the work;  @param truths  may be null
    Work(const DeskPlan& plan, PointerIndex pointer, Device& device, std::uint64_t seed,
         std::vector<AimedTruth>* truths);

    /// Performs the next activity from `start` on, and appends its reports to `batch`.
    [[nodiscard]] Done perform(PointerTime start, const Form& form, ReportBatch& batch);

private:
    struct Target {
        Pixels distance;
        Pixels width;
    };
    [[nodiscard]] Target draw_target(double distance_factor);
    [[nodiscard]] Button draw_button();
    [[nodiscard]] AimedPath aim_at(const Target& target);
    [[nodiscard]] double px_of(const AimedPath& path) const;
    /// Motion and press, without the release. @return the press
    PointerTime arrive(const AimedPath& path, const Target& target, Button button,
                       PointerTime start, bool truth);
    PointerTime release(PointerTime press, Button button);

    PointerTime click(PointerTime start, const AimedPath& path, const Target& target);
    PointerTime double_click(PointerTime start);
    PointerTime drag(PointerTime start);
    PointerTime clutch(PointerTime start);
    PointerTime still_press(PointerTime start);
    PointerTime turn_wheel(PointerTime start);
    PointerTime roam(PointerTime start, std::size_t legs);

    const DeskPlan& m_plan;
    PointerIndex m_pointer;
    Device& m_device;
    double m_mm_per_px;
    Random m_random;
    std::vector<AimedTruth>* m_truths;
    std::size_t m_roaming = 0; ///< pieces of a long wandering still to come
    Form m_form;
    ReportBatch* m_batch = nullptr;
};

} // namespace sagitta::estimator::hand
