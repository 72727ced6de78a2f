#include "ledger/turn.h"

#include <utility>

namespace drover::ledger {

absl::StatusOr<store::Appended> Turn::emit(std::int64_t study, study::Event event) {
  const auto fail = [this](absl::Status status) {
    broken_ = true;
    return status;
  };
  if (!in_transaction_) {
    if (absl::Status begun = store_.begin(); !begun.ok()) return fail(std::move(begun));
    in_transaction_ = true;
  }
  if (!saved_) {
    if (absl::Status saved = store_.savepoint(); !saved.ok()) return fail(std::move(saved));
    saved_ = true;
  }
  event.set_time_us(absl::ToUnixMicros(now_.wall));
  event.set_study(study);
  absl::StatusOr<store::Appended> appended = store_.append(event);
  if (!appended.ok()) return fail(std::move(appended).status());
  if (first_event_ == 0) first_event_ = appended->number;
  if (absl::Status applied = state_.apply(event, now_.steady); !applied.ok()) return fail(std::move(applied));
  if (study != 0) touched_.insert(study);
  // Whatever ends an attempt, opens a run or brings a worker; a grant or a beginning never frees anything.
  may_grant_ = may_grant_ || !(event.has_granted() || event.has_begun() || event.has_answered());
  return appended;
}

}  // namespace drover::ledger
