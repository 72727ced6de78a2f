#include "ledger/ledger.h"

#include <algorithm>
#include <chrono>
#include <utility>

#include "absl/strings/str_cat.h"
#include "status/try.h"

namespace drover::ledger {

absl::StatusOr<std::unique_ptr<Ledger>> Ledger::start(std::unique_ptr<store::Store> store, Options options) {
  DROVER_TRY(options.times.validate());
  std::unique_ptr<Ledger> ledger(new Ledger(std::move(store), std::move(options)));
  DROVER_TRY(ledger->recover());
  ledger->thread_ = std::jthread([self = ledger.get()] { self->loop(); });
  return ledger;
}

Ledger::Ledger(std::unique_ptr<store::Store> store, Options options)
    : store_(std::move(store)), options_(std::move(options)), now_(options_.clock()), started_(now_.wall) {
  tick_ = std::clamp(options_.times.lease / 10, absl::Milliseconds(20), absl::Seconds(1));
}

Ledger::~Ledger() { drain(); }

absl::Status Ledger::recover() {
  DROVER_ASSIGN(state_, State::load(*store_, options_.times, now_.steady));
  Turn turn(*store_, *state_, now_, false);
  study::Event term;
  term.mutable_term_begun()->set_term(store_->term() + 1);
  term.mutable_term_begun()->set_version(options_.version);
  DROVER_TRY(turn.emit(0, std::move(term)).status());
  study::Event pools;
  auto& counts = *pools.mutable_licence_pools_set()->mutable_counts();
  for (const auto& [name, count] : options_.licences) counts[name] = count;
  DROVER_TRY(turn.emit(0, std::move(pools)).status());
  DROVER_TRY(store_->commit());
  state_->book.start(now_.steady);
  next_tick_ = now_.steady;
  publish();
  return absl::OkStatus();
}

void Ledger::submit(Call call) {
  {
    const std::lock_guard lock(mutex_);
    if (!ending_) {
      queue_.push_back(std::move(call));
      changed_.notify_one();
      return;
    }
  }
  call.answer(absl::UnavailableError("the coordinator is stopping"));
}

void Ledger::drain() {
  {
    const std::lock_guard lock(mutex_);
    ending_ = true;
  }
  changed_.notify_all();
  if (thread_.joinable()) thread_.join();
}

void Ledger::loop() {
  while (true) {
    std::vector<Call> calls = take();
    const bool last = [&] {
      const std::lock_guard lock(mutex_);
      return ending_ && queue_.empty();
    }();
    turn(std::move(calls));
    if (!last) continue;
    for (Waiting& poll : polls_) poll.call.answer(absl::UnavailableError("the coordinator is stopping"));
    polls_.clear();
    static_cast<void>(store_->checkpoint());
    return;
  }
}

std::vector<Call> Ledger::take() {
  std::unique_lock lock(mutex_);
  const absl::Duration left = std::max(next_tick_ - options_.clock().steady, absl::ZeroDuration());
  changed_.wait_for(lock, absl::ToChronoMicroseconds(left), [this] { return ending_ || !queue_.empty(); });
  std::vector<Call> calls;
  while (!queue_.empty() && static_cast<int>(calls.size()) < kMostInCommit) {
    calls.push_back(std::move(queue_.front()));
    queue_.pop_front();
  }
  return calls;
}

void Ledger::turn(std::vector<Call> calls) {
  now_ = options_.clock();
  state_->book.turn(now_.steady);
  std::vector<Done> done;
  for (Call& call : calls) take_turn(std::move(call), done);
  if (now_.steady >= next_tick_) {
    pass_time_in_turn(done);
    next_tick_ = now_.steady + tick_;
    may_grant_ = true;  // a wait after a loss may be over
  }
  retry_polls(done);
  finish(std::move(done));
}

void Ledger::take_turn(Call call, std::vector<Done>& done) {
  if (call.gone && call.gone()) {  // nothing is done for it, but every call must be answered, or its server cannot end
    done.push_back({std::move(call), absl::CancelledError("the caller hung up")});
    return;
  }
  Turn turn(*store_, *state_, now_, in_transaction_);
  absl::StatusOr<std::string> answer = decide(call, turn);
  in_transaction_ = turn.in_transaction();
  const bool written = turn.first_event() != 0;
  if (turn.broken() || (!answer.ok() && written)) {
    undo(turn, done, answer.status());
    done.push_back({std::move(call), answer.status()});
    return;
  }
  if (written) {
    if (absl::Status released = store_->release(); !released.ok()) return fatal(released);
    touched_.insert(turn.touched().begin(), turn.touched().end());
    may_grant_ = may_grant_ || turn.may_grant();
  }
  const bool waits = answer.ok() && call.empty_handed && call.wait > absl::ZeroDuration() && call.empty_handed(*answer);
  if (waits && !written) {
    const absl::Duration until = now_.steady + std::min(call.wait, options_.times.longest_poll);
    polls_.push_back({std::move(call), until});
    return;
  }
  done.push_back({std::move(call), std::move(answer), written});
}

absl::StatusOr<std::string> Ledger::decide(Call& call, Turn& turn) {
  if (!call.request_id.empty()) {
    DROVER_ASSIGN(const std::optional<store::StoredAnswer> stored, store_->answer_of(call.request_id));
    if (stored && (stored->digest != call.digest || stored->principal != call.principal)) {
      return refusal(absl::StatusCode::kAlreadyExists, "REQUEST_ID_REUSED",
                     absl::StrCat("request ", call.request_id, " was made before with other content"));
    }
    if (stored) {
      // Whoever repeats a question has read its answer by now: it must not wait for another.
      call.empty_handed = nullptr;
      return stored->response;
    }
  }
  DROVER_ASSIGN(std::string bytes, call.decide(turn));
  if (turn.first_event() != 0) DROVER_TRY(store_answer(call, bytes, turn));
  return bytes;
}

absl::Status Ledger::store_answer(const Call& call, const std::string& bytes, Turn& turn) {
  if (call.request_id.empty()) return absl::OkStatus();
  study::Event event;
  study::Answered& answered = *event.mutable_answered();
  answered.set_request_id(call.request_id);
  answered.set_principal(call.principal);
  answered.set_digest(call.digest);
  answered.set_response(bytes);
  answered.set_first_event(turn.first_event());
  return turn.emit(0, std::move(event)).status();
}

// Takes back what the request did. A full disk may have taken the whole transaction with it; then everything that was
// decided in it is answered with the same error, and nobody was told otherwise yet.
void Ledger::undo(Turn& turn, std::vector<Done>& done, const absl::Status& why) {
  if (absl::IsDataLoss(why)) return fatal(why);
  const bool back =
      turn.saved() && store_->in_transaction() && store_->rollback_to().ok() && store_->release().ok();
  if (!back) store_->rollback();  // also where SQLite has done so by itself: the chain's head goes back, too
  if (!store_->in_transaction()) {
    for (Done& earlier : done) {
      if (earlier.written) earlier.answer = why;
      earlier.written = false;
    }
    touched_.clear();
    in_transaction_ = false;
  }
  if (absl::IsResourceExhausted(why)) disk_ok_ = false;
  reload();
}

void Ledger::pass_time_in_turn(std::vector<Done>& done) {
  Turn turn(*store_, *state_, now_, in_transaction_);
  const absl::Status passed = pass_time(turn);
  in_transaction_ = turn.in_transaction();
  if (!passed.ok()) return undo(turn, done, passed);
  if (turn.first_event() == 0) return;
  if (absl::Status released = store_->release(); !released.ok()) return fatal(released);
  touched_.insert(turn.touched().begin(), turn.touched().end());
}

// In the order of their arrival: the longest waiting worker gets the first run.
void Ledger::retry_polls(std::vector<Done>& done) {
  const bool anew = std::exchange(may_grant_, false);
  std::deque<Waiting> polls = std::move(polls_);
  polls_.clear();
  for (Waiting& poll : polls) {
    const bool over = now_.steady >= poll.until;
    if (!anew && !over && !(poll.call.gone && poll.call.gone())) {
      polls_.push_back(std::move(poll));
      continue;
    }
    poll.call.wait = over ? absl::ZeroDuration() : poll.until - now_.steady;
    take_turn(std::move(poll.call), done);
  }
  may_grant_ = false;  // what the polls themselves did frees nothing
}

void Ledger::finish(std::vector<Done> done) {
  if (options_.plant_early_answers_for_test) {
    for (Done& one : done) one.call.answer(one.answer);
  }
  if (in_transaction_) {
    const absl::Status committed = store_->commit();
    in_transaction_ = false;
    if (absl::IsDataLoss(committed)) return fatal(committed);
    if (!committed.ok()) {
      for (Done& one : done) {
        if (one.written) one.answer = committed;
      }
      store_->rollback();
      touched_.clear();
      disk_ok_ = !absl::IsResourceExhausted(committed);
      reload();
    } else {
      disk_ok_ = true;
    }
  }
  state_->forget_ended();
  publish();
  if (!options_.plant_early_answers_for_test) {
    for (Done& one : done) one.call.answer(std::move(one.answer));
  }
  options_.writable(disk_ok_);
  if (!touched_.empty()) options_.committed(std::exchange(touched_, {}));
}

void Ledger::reload() {
  absl::StatusOr<std::unique_ptr<State>> fresh = State::load(*store_, options_.times, now_.steady);
  if (!fresh.ok()) return fatal(fresh.status());
  (*fresh)->book.keep_times_of(state_->book);
  state_ = *std::move(fresh);
}

void Ledger::fatal(const absl::Status& status) { options_.die(status); }

}  // namespace drover::ledger
