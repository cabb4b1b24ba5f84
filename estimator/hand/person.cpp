#include "estimator/hand/person.hpp"

#include <cmath>

namespace sagitta::estimator::hand {

Person draw_person(const Person& middle, std::uint64_t seed) {
    Random random{seed, 0x9e12};
    Person person = middle;
    const auto scaled = [&random](Micros duration, double log_sd) {
        const double us = static_cast<double>(duration.count()) * random.log_normal(1.0, log_sd);
        return Micros{std::llround(us)};
    };
    person.index_of_performance = middle.index_of_performance * random.log_normal(1.0, 0.15);
    person.intercept = scaled(middle.intercept, 0.12);
    person.dwell = scaled(middle.dwell, 0.20);
    person.primary_spread *= random.log_normal(1.0, 0.15);
    person.lateral_noise *= random.log_normal(1.0, 0.25);
    person.detour_share *= random.log_normal(1.0, 0.15);
    person.tremor_amplitude = middle.tremor_amplitude * random.log_normal(1.0, 0.30);
    person.bow += 0.01 * random.normal();
    return person;
}

Form draw_form(const Person& person, Random& random) {
    Form form;
    form.time = random.log_normal(1.0, person.session_spread);
    form.lateral = random.log_normal(1.0, person.lateral_session_spread);
    return form;
}

} // namespace sagitta::estimator::hand
