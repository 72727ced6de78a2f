// One request's turn at the store: what it may read and the only way in which it changes something.
#pragma once

#include <cstdint>
#include <set>
#include <string>

#include "absl/status/status.h"
#include "absl/status/statusor.h"
#include "absl/time/time.h"
#include "ledger/state.h"
#include "store/store.h"
#include "study/events.pb.h"

namespace drover::ledger {

struct Now {
  absl::Duration steady;  // decides
  absl::Time wall;        // for people, deadlines and records
};

class Turn {
 public:
  Turn(store::Store& store, State& state, Now now, bool in_transaction)
      : store_(store), state_(state), now_(now), in_transaction_(in_transaction) {}

  // Appends the event to the store and applies it to the memory; `study` 0: of no study. After an error the whole
  // turn is undone by its caller.
  absl::StatusOr<store::Appended> emit(std::int64_t study, study::Event event);

  store::Store& store() { return store_; }
  State& state() { return state_; }
  const Now& now() const { return now_; }
  std::int64_t first_event() const { return first_event_; }   // 0: none yet
  bool in_transaction() const { return in_transaction_; }
  bool broken() const { return broken_; }  // an emit failed, and may have left half an event in the transaction
  bool saved() const { return saved_; }    // a savepoint stands before the first event
  const std::set<std::int64_t>& touched() const { return touched_; }  // studies
  // Something happened after which a waiting Lease may find a run.
  bool may_grant() const { return may_grant_; }

 private:
  store::Store& store_;
  State& state_;
  Now now_;
  bool in_transaction_;
  bool broken_ = false;
  bool saved_ = false;
  bool may_grant_ = false;
  std::int64_t first_event_ = 0;
  std::set<std::int64_t> touched_;
};

}  // namespace drover::ledger
