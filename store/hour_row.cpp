#include "store/hour_row.hpp"

#include "store/hour_blob.hpp"

namespace sagitta::store {

using estimator::HourSummary;
using estimator::Micros;

namespace {

template <class AnyMoments, class Coder>
void moments(AnyMoments& values, Coder& coder) {
    coder.count(values.n);
    coder.real(values.mean);
    coder.real(values.m2);
}

template <class AnyMoments, class Coder>
void pair_moments(AnyMoments& values, Coder& coder) {
    coder.count(values.n);
    coder.real(values.mean_x);
    coder.real(values.mean_y);
    coder.real(values.m2_x);
    coder.real(values.m2_y);
    coder.real(values.m_xy);
}

/// Every value in the order of the columns. One list for both directions, so that they agree.
template <class AnySummary, class Coder>
void for_each_value(AnySummary& summary, Coder& coder) {
    coder.quantity(summary.reference_width);
    for (auto& count : summary.outcomes) {
        coder.count(count);
    }
    coder.count(summary.presses);
    coder.count(summary.wheel_120ths);
    coder.count(summary.motion_reports);
    coder.time(summary.active);
    coder.quantity(summary.hand_travel);
    coder.count(summary.clicks);
    coder.count(summary.clicks_cpi_assumed);
    coder.time(summary.movement_time);
    for (auto& bits : summary.difficulty_bits) {
        coder.real(bits);
    }
    pair_moments(summary.log_distance_time, coder);
    pair_moments(summary.log_distance_error, coder);
    moments(summary.log_path_ratio, coder);
    moments(summary.direction_changes, coder);
    moments(summary.submovements, coder);
    moments(summary.peak_speed_mm_s, coder);
    coder.histogram(summary.distance_px);
    coder.histogram(summary.movement_time_ms);
    coder.histogram(summary.error_centipx);
    coder.sectors(summary.sectors);
}

class Encoder {
public:
    explicit Encoder(Statement& statement) : m_statement{statement} {}

    void count(std::uint64_t value) { m_statement.bind_integer(static_cast<std::int64_t>(value)); }
    void real(double value) { m_statement.bind_real(value); }
    void time(Micros value) { m_statement.bind_integer(value.count()); }
    template <class Unit>
    void quantity(estimator::Quantity<Unit> value) {
        real(value.value());
    }
    void histogram(const estimator::LogHistogram& value) { m_statement.bind_blob(encode(value)); }
    void sectors(const Sectors& value) { m_statement.bind_blob(encode(value)); }

private:
    Statement& m_statement;
};

class Decoder {
public:
    Decoder(const Statement& row, int first_column) : m_row{row}, m_column{first_column} {}

    [[nodiscard]] bool valid() const { return m_valid; }
    void count(std::uint64_t& value) {
        const auto stored = m_row.integer(m_column++);
        m_valid = m_valid && stored >= 0;
        value = static_cast<std::uint64_t>(stored);
    }
    void real(double& value) { value = m_row.real(m_column++); }
    void time(Micros& value) { value = Micros{m_row.integer(m_column++)}; }
    template <class Unit>
    void quantity(estimator::Quantity<Unit>& value) {
        value = estimator::Quantity<Unit>::of(m_row.real(m_column++));
    }
    void histogram(estimator::LogHistogram& value) {
        accept(decode_histogram(m_row.blob(m_column++)), value);
    }
    void sectors(Sectors& value) { accept(decode_sectors(m_row.blob(m_column++)), value); }

private:
    template <class Value>
    void accept(const std::optional<Value>& decoded, Value& value) {
        if (decoded) {
            value = *decoded;
        } else {
            m_valid = false;
        }
    }
    const Statement& m_row;
    int m_column;
    bool m_valid = true;
};

} // namespace

const char* hour_columns() {
    return "id, start_us, pointer, condition, reference_width_px, scored_click, scored_drag, "
           "repeat_press, other_button_down, no_motion, too_short, too_slow, long_dwell, "
           "wandering, lost_reports, interrupted, no_press, presses, wheel_120ths, "
           "motion_reports, active_us, hand_travel_mm, clicks, clicks_cpi_assumed, "
           "movement_time_us, difficulty_half_width_bits, difficulty_bits, "
           "difficulty_double_width_bits, distance_time_n, distance_time_mean_ln_px, "
           "distance_time_mean_ln_s, distance_time_m2_ln_px, distance_time_m2_ln_s, "
           "distance_time_m_product, distance_error_n, distance_error_mean_ln_distance, "
           "distance_error_mean_ln_error, distance_error_m2_ln_distance, "
           "distance_error_m2_ln_error, distance_error_m_product, ln_path_ratio_n, "
           "ln_path_ratio_mean, ln_path_ratio_m2, direction_changes_n, direction_changes_mean, "
           "direction_changes_m2, submovements_n, submovements_mean, submovements_m2, "
           "peak_speed_n, peak_speed_mean_mm_s, peak_speed_m2, distance_px_histogram, "
           "movement_time_ms_histogram, error_centipx_histogram, sectors";
}

const std::string& replace_hour_sql() {
    static const std::string sql = std::string{"INSERT OR REPLACE INTO hour ("} + hour_columns() +
                                   ") VALUES (?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,"
                                   "?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?)";
    return sql;
}

void bind_hour(Statement& statement, std::optional<std::int64_t> row_id, const StoredHour& hour) {
    statement.bind_integer(row_id);
    statement.bind_integer(hour.start.time_since_epoch().count());
    statement.bind_integer(static_cast<std::int64_t>(hour.pointer));
    statement.bind_integer(static_cast<std::int64_t>(hour.condition));
    Encoder coder{statement};
    for_each_value(hour.summary, coder);
}

std::optional<HourRow> read_hour(const Statement& row) {
    HourRow read{.row_id = row.integer(0),
                 .hour = {.start = UtcTime{Micros{row.integer(1)}},
                          .pointer = PointerId{row.integer(2)},
                          .condition = ConditionId{row.integer(3)},
                          .summary = {}}};
    constexpr int k_first_value = 4;
    Decoder coder{row, k_first_value};
    for_each_value(read.hour.summary, coder);
    return coder.valid() ? std::optional{read} : std::nullopt;
}

} // namespace sagitta::store
