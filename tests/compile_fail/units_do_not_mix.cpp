// Compiles as it is; must not compile with MUST_NOT_COMPILE set to 1, 2, ...: each is one way of
// mixing units.
#include "estimator/units.hpp"

using namespace sagitta::estimator;

static_assert((Pixels::of(3.0) + Pixels::of(4.0)).value() == 7.0);
static_assert(Pixels::of(3.0) < Pixels::of(4.0));
static_assert(Pixels::of(6.0) / Pixels::of(3.0) == 2.0);
constexpr Millimetres k_travel = Millimetres::of(3.0) * 2.0;

#ifdef MUST_NOT_COMPILE
#if MUST_NOT_COMPILE == 1 // a screen length and a hand length do not add up
constexpr auto k_sum = Pixels::of(3.0) + Millimetres::of(4.0);
#elif MUST_NOT_COMPILE == 2 // nor compare
constexpr bool k_less = Pixels::of(3.0) < Millimetres::of(4.0);
#elif MUST_NOT_COMPILE == 3 // a bare number has no unit
constexpr Pixels k_bare = 3.0;
#elif MUST_NOT_COMPILE == 4 // a missing number cannot pass for zero
constexpr Pixels k_missing{};
#elif MUST_NOT_COMPILE == 5 // one unit is not another
constexpr Millimetres k_other = Pixels::of(3.0);
#elif MUST_NOT_COMPILE == 6 // nor a ratio of two units a number
constexpr double k_ratio = Pixels::of(3.0) / Millimetres::of(4.0);
#elif MUST_NOT_COMPILE == 7 // a pointer's stamp is not a time of day
constexpr UtcTime k_utc = PointerTime{};
#endif
#endif
