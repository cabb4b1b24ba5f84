#include "store/movement_row.hpp"

#include <cmath>
#include <limits>

namespace sagitta::store {

using estimator::Micros;

namespace {

/// Steps per unit.
struct Scale {
    double steps;
};
constexpr Scale k_hundredths{100.0};
constexpr Scale k_tenths{10.0};
constexpr Scale k_thousandths{1e3};
constexpr Scale k_ten_thousandths{1e4};

/// For times that do not place a movement: a tenth of a millisecond.
using HundredMicros = std::chrono::duration<std::int64_t, std::ratio<1, 10'000>>;

/// Every score in the order of the columns. One list for both directions, so that they agree.
template <class AnyScores, class Coder>
void for_each_score(AnyScores& scores, Coder& coder) {
    coder.number(scores.distance, k_hundredths);
    coder.direction(scores.direction);
    coder.time(scores.movement_time);
    coder.coarse_time(scores.dwell);
    coder.number(scores.path, k_hundredths);
    coder.number(scores.error, k_hundredths);
    coder.number(scores.offset, k_hundredths);
    coder.number(scores.variability, k_hundredths);
    coder.number(scores.max_deviation, k_hundredths);
    coder.count(scores.axis_crossings);
    coder.count(scores.direction_changes);
    coder.count(scores.orthogonal_changes);
    coder.number(scores.peak_speed, k_tenths);
    coder.coarse_time(scores.time_to_peak);
    coder.count(scores.submovements);
    coder.number(scores.primary_fraction, k_ten_thousandths);
    coder.number(scores.primary_lateral, k_hundredths);
    coder.turn(scores.initial_angle);
    coder.number(scores.smoothness_sparc, k_thousandths);
    coder.number(scores.smoothness_ldlj, k_thousandths);
    coder.number(scores.hand_travel, k_hundredths);
    coder.count(scores.reports);
    coder.count(scores.flags);
}

std::optional<std::int64_t> steps_of(double value, Scale scale) {
    const double steps = value * scale.steps;
    constexpr double k_limit = 9.2e18;  // just inside 64 bits
    if (!(std::abs(steps) < k_limit)) { // also NaN
        return std::nullopt;
    }
    return std::llround(steps);
}

class Encoder {
public:
    explicit Encoder(Statement& statement) : m_statement{statement} {}

    void integer(std::int64_t value) { m_statement.bind_integer(value); }
    void time(Micros value) { integer(value.count()); }
    void coarse_time(Micros value) { integer(std::chrono::round<HundredMicros>(value).count()); }
    void number(double value, Scale scale) { m_statement.bind_integer(steps_of(value, scale)); }
    template <class Unit>
    void number(estimator::Quantity<Unit> value, Scale scale) {
        number(value.value(), scale);
    }
    /// [0, 360): what rounds up to a full turn is 0.
    void direction(estimator::Degrees value) {
        const auto steps = steps_of(value.value(), k_tenths);
        m_statement.bind_integer(steps == 3600 ? 0 : steps);
    }
    /// (-180, 180]: what rounds down to -180 is 180.
    void turn(estimator::Degrees value) {
        const auto steps = steps_of(value.value(), k_tenths);
        m_statement.bind_integer(steps == -1800 ? 1800 : steps);
    }
    template <class Count>
    void count(Count value) {
        integer(static_cast<std::int64_t>(value));
    }

private:
    Statement& m_statement;
};

class Decoder {
public:
    explicit Decoder(const Statement& row) : m_row{row} {}

    [[nodiscard]] bool valid() const { return m_valid; }
    [[nodiscard]] std::int64_t integer() { return m_row.integer(m_column++); }
    [[nodiscard]] estimator::UtcTime utc() { return estimator::UtcTime{Micros{integer()}}; }
    void time(Micros& value) { value = Micros{integer()}; }
    void coarse_time(Micros& value) { value = HundredMicros{integer()}; }
    /// Dividing gives the double nearest to the decimal, which prints as that decimal.
    void number(double& value, Scale scale) {
        value = m_row.is_null(m_column)
                    ? std::numeric_limits<double>::quiet_NaN()
                    : static_cast<double>(m_row.integer(m_column)) / scale.steps;
        ++m_column;
    }
    template <class Unit>
    void number(estimator::Quantity<Unit>& value, Scale scale) {
        double plain = 0.0;
        number(plain, scale);
        value = estimator::Quantity<Unit>::of(plain);
    }
    void direction(estimator::Degrees& value) { number(value, k_tenths); }
    void turn(estimator::Degrees& value) { number(value, k_tenths); }
    template <class Count>
    void count(Count& value) {
        value = narrowed<Count>(0, std::numeric_limits<Count>::max());
    }
    template <class Target>
    [[nodiscard]] Target narrowed(std::int64_t low, std::int64_t high) {
        const auto value = integer();
        m_valid = m_valid && low <= value && value <= high;
        return static_cast<Target>(value);
    }

private:
    const Statement& m_row;
    int m_column = 0;
    bool m_valid = true;
};

} // namespace

const char* movement_columns() {
    return "press_us, pointer, condition, kind, button, distance_centipx, direction_decideg, "
           "movement_time_us, dwell_100us, path_centipx, error_centipx, offset_centipx, "
           "variability_centipx, max_deviation_centipx, axis_crossings, direction_changes, "
           "orthogonal_changes, peak_speed_decimm_s, time_to_peak_100us, submovements, "
           "primary_fraction_e4, primary_lateral_centipx, initial_angle_decideg, "
           "smoothness_sparc_e3, smoothness_ldlj_e3, hand_travel_centimm, reports, flags";
}

const std::string& insert_movement_sql() {
    static const std::string sql = std::string{"INSERT INTO movement ("} + movement_columns() +
                                   ") VALUES (?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,"
                                   "?,?)";
    return sql;
}

void bind_movement(Statement& statement, const StoredMovement& movement) {
    Encoder coder{statement};
    coder.integer(movement.press.time_since_epoch().count());
    coder.integer(static_cast<std::int64_t>(movement.pointer));
    coder.integer(static_cast<std::int64_t>(movement.condition));
    coder.integer(static_cast<std::int64_t>(movement.kind));
    coder.integer(static_cast<std::int64_t>(movement.button));
    for_each_score(movement.scores, coder);
}

std::optional<StoredMovement> read_movement(const Statement& row) {
    Decoder coder{row};
    const auto press = coder.utc();
    StoredMovement movement{.start = press,
                            .press = press,
                            .pointer = PointerId{coder.integer()},
                            .condition = ConditionId{coder.integer()},
                            .kind = coder.narrowed<estimator::MovementKind>(0, 1),
                            .button = coder.narrowed<estimator::Button>(0, 255),
                            .scores = {}};
    for_each_score(movement.scores, coder);
    movement.start = press - movement.scores.movement_time;
    return coder.valid() ? std::optional{movement} : std::nullopt;
}

} // namespace sagitta::store
