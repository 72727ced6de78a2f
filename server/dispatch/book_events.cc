// How each event changes what is booked.
#include <algorithm>
#include <utility>

#include "absl/strings/str_cat.h"
#include "dispatch/book.h"
#include "status/try.h"

namespace drover::dispatch {
namespace {

constexpr std::size_t kTimesRemembered = 100;

absl::Status misfit(const char* event, std::int64_t run, std::int64_t fence) {
  return absl::InternalError(absl::StrCat("event ", event, " does not fit attempt ", fence, " at run ", run));
}

}  // namespace

absl::Status Book::apply(const study::Event& event, absl::Duration now) {
  using study::Event;
  switch (event.kind_case()) {
    case Event::kLicencePoolsSet:
      counts_ = {event.licence_pools_set().counts().begin(), event.licence_pools_set().counts().end()};
      return absl::OkStatus();
    case Event::kSessionOpened:
      open_session(event.session_opened(), now);
      return absl::OkStatus();
    case Event::kAsksIssued:
      for (const study::IssuedAsk& ask : event.asks_issued().asks()) {
        for (const study::IssuedRun& run : ask.runs()) {
          add_run({.id = run.run(), .study = event.study(), .number = run.number(), .candidate = ask.candidate(),
                   .condition = run.condition(), .replicate = run.replicate(), .code = run.code(),
                   .input_digest = run.input_digest()});
        }
      }
      return absl::OkStatus();
    case Event::kGranted:
      return granted(event.granted(), now);
    case Event::kBegun:
      return change(event.begun().run(), event.begun().fence(), Attempt::State::kBegun, now);
    case Event::kParked:
      return change(event.parked().run(), event.parked().fence(), Attempt::State::kParked, now);
    case Event::kStopAsked:
      return change(event.stop_asked().run(), event.stop_asked().fence(), Attempt::State::kStopping, now);
    case Event::kHeard:
      return heard_again(event.heard(), now);
    case Event::kHandedBack:
      return end_attempt(event.handed_back().run(), event.handed_back().fence());
    case Event::kReleased: {
      Attempt* const attempt = find(event.released().run(), event.released().fence());
      if (attempt == nullptr) return misfit("released", event.released().run(), event.released().fence());
      attempt->released = true;
      requeue(*find(event.released().run()));
      return absl::OkStatus();
    }
    case Event::kLicencesReleased: {
      Attempt* const attempt = find(event.licences_released().run(), event.licences_released().fence());
      if (attempt != nullptr) release_licences(*attempt);
      return absl::OkStatus();
    }
    case Event::kAttemptLost:
      return lost(event.attempt_lost(), now);
    case Event::kSettled:
      remember_time(event.settled().run(), event.settled().report());
      DROVER_TRY(close(event.settled().run()));
      return end_attempt(event.settled().run(), event.settled().fence());
    case Event::kDuplicate:
      return end_attempt(event.duplicate().run(), event.duplicate().fence());
    case Event::kWithdrawn:
      DROVER_TRY(close(event.withdrawn().run()));
      forget_if_done(event.withdrawn().run());
      return absl::OkStatus();
    case Event::kSetAside: {
      Run* const run = find(event.set_aside().run());
      if (run == nullptr) return misfit("set_aside", event.set_aside().run(), 0);
      run->set_aside = true;
      requeue(*run);
      return absl::OkStatus();
    }
    default:
      return absl::OkStatus();
  }
}

void Book::remember_time(std::int64_t run, const v1::AttemptReport& report) {
  const Run* const booked = find(run);
  if (booked == nullptr || !report.usage().has_wall()) return;
  std::deque<absl::Duration>& recent = studies_[booked->study].recent;
  recent.push_back(absl::Seconds(report.usage().wall().seconds()) + absl::Nanoseconds(report.usage().wall().nanos()));
  if (recent.size() > kTimesRemembered) recent.pop_front();
}

void Book::open_session(const study::SessionOpened& opened, absl::Duration now) {
  add_session({.id = opened.session(), .token = opened.token(), .worker = opened.worker(), .host = opened.host(),
               .version = opened.version(), .incarnation = opened.incarnation(), .slots = opened.slots(),
               .code_digests = {opened.code_digests().begin(), opened.code_digests().end()},
               .tags = {opened.tags().begin(), opened.tags().end()}, .fleet_job = opened.fleet_job(), .heard = now});
}

absl::Status Book::granted(const study::Granted& granted, absl::Duration now) {
  Run* const run = find(granted.run());
  const Session* const holder = session(granted.session());
  if (run == nullptr || holder == nullptr || !run->waiting() || granted.fence() <= run->fence) {
    return misfit("granted", granted.run(), granted.fence());
  }
  Attempt attempt{.fence = granted.fence(), .session = granted.session(), .worker = holder->worker, .since = now,
                  .licences = {granted.licences().begin(), granted.licences().end()}};
  hold_licences(attempt);
  attempts_by_worker_[attempt.worker].insert({run->id, attempt.fence});
  run->fence = attempt.fence;
  run->attempts[attempt.fence] = std::move(attempt);
  ++studies_[run->study].out;
  requeue(*run);
  return absl::OkStatus();
}

absl::Status Book::change(std::int64_t run, std::int64_t fence, Attempt::State state, absl::Duration now) {
  Attempt* const attempt = find(run, fence);
  if (attempt == nullptr) return misfit("of a new state", run, fence);
  attempt->state = state;
  attempt->since = now;
  requeue(*find(run));
  return absl::OkStatus();
}

absl::Status Book::heard_again(const study::Heard& heard, absl::Duration now) {
  Attempt* const attempt = find(heard.run(), heard.fence());
  if (attempt == nullptr) return misfit("heard", heard.run(), heard.fence());
  attempt->session = heard.session();
  if (attempt->state == Attempt::State::kStopping) return absl::OkStatus();
  attempt->released = false;
  return change(heard.run(), heard.fence(), heard.begun() ? Attempt::State::kBegun : Attempt::State::kGranted, now);
}

absl::Status Book::end_attempt(std::int64_t run, std::int64_t fence) {
  Attempt* const attempt = find(run, fence);
  // A late report may settle a run of which this attempt was booked as ended: lost by the roll call, found later.
  if (attempt == nullptr) {
    forget_if_done(run);
    return absl::OkStatus();
  }
  release_licences(*attempt);
  if (const auto at = attempts_by_worker_.find(attempt->worker); at != attempts_by_worker_.end()) {
    at->second.erase({run, fence});
    if (at->second.empty()) attempts_by_worker_.erase(at);
  }
  Run* const booked = find(run);
  booked->attempts.erase(fence);
  --studies_[booked->study].out;
  requeue(*booked);
  forget_if_done(run);
  return absl::OkStatus();
}

absl::Status Book::close(std::int64_t run) {
  Run* const booked = find(run);
  if (booked == nullptr || booked->closed) return misfit("that ends a run", run, 0);
  booked->closed = true;
  studies_[booked->study].open.erase(run);
  requeue(*booked);
  return absl::OkStatus();
}

absl::Status Book::lost(const study::AttemptLost& lost, absl::Duration now) {
  Run* const run = find(lost.run());
  const Attempt* const attempt = find(lost.run(), lost.fence());
  if (run == nullptr || attempt == nullptr) return misfit("attempt_lost", lost.run(), lost.fence());
  if (lost.report().abnormal()) run->abnormal_on.insert(attempt->worker);
  switch (lost.report().loss()) {
    case v1::LOSS_REASON_EXIT_UNKNOWN:
    case v1::LOSS_REASON_KILLED_FROM_OUTSIDE:
    case v1::LOSS_REASON_SITE:
      back_off(*run, now);
      break;
    default:  // the machine or the daemon went: nothing speaks against trying at once
      break;
  }
  return end_attempt(lost.run(), lost.fence());
}

void Book::back_off(Run& run, absl::Duration now) const {
  absl::Duration wait = times_.retry_first;
  for (int loss = 0; loss < run.losses && wait < times_.retry_most; ++loss) wait *= 2;
  ++run.losses;
  run.not_before = now + std::min(wait, times_.retry_most);
}

}  // namespace drover::dispatch
