// Leases and renewals, and how calls are repeated.
#include "session/conversation.h"

#include <algorithm>
#include <utility>

#include "absl/strings/str_cat.h"
#include "link/duration.h"
#include "link/status.h"
#include "spdlog/spdlog.h"

namespace drover::session {
namespace {

constexpr absl::Duration kLook = absl::Seconds(1);  // how often an idle loop looks whether it has to end
constexpr absl::Duration kAskAgain = absl::Milliseconds(20);
constexpr double kJitter = 0.2;

v1::RollState state_of(Phase phase) {
  switch (phase) {
    case Phase::kAccepted:
      return v1::ROLL_STATE_NOT_BEGUN;
    case Phase::kRunning:
      return v1::ROLL_STATE_RUNNING;
    case Phase::kEnded:
    case Phase::kReady:
      return v1::ROLL_STATE_ENDED;
  }
  return v1::ROLL_STATE_UNSPECIFIED;
}

}  // namespace

Conversation::Conversation(const Options& options, std::vector<v1::CodeDefinition> codes, Parties parties)
    : options_(options), codes_(std::move(codes)), parties_(parties), draws_(options.seed) {}

link::Backoff Conversation::fresh_backoff() {
  return link::Backoff(draws_++, options_.times.retry_first, options_.times.retry_most);
}

absl::Duration Conversation::jittered(absl::Duration span) {
  // A back-off of one step is drawn between half and all of its first wait.
  const double share = absl::FDivDuration(link::Backoff(draws_++, absl::Seconds(1), absl::Seconds(1)).next(),
                                          absl::Seconds(1));  // [0.5, 1)
  return span * (1 - kJitter + 4 * kJitter * (share - 0.5));
}

bool Conversation::repeat(const char* call, const absl::Status& status, link::Backoff& backoff,
                          std::int64_t generation) {
  if (pause_.ended()) return false;
  if (link::error_reason(status) == "NO_SUCH_SESSION") {
    spdlog::warn("the coordinator does not know this session any more; enrolling again");
    session_.lost(generation);
    return false;
  }
  if (!link::worth_repeating(status)) {
    spdlog::error("{} was refused: {}", call, status.ToString());
    pause_.wait(options_.times.retry_most);
    return false;
  }
  const absl::Duration wait = backoff.next();
  spdlog::info("{} was not answered, again in {}: {}", call, link::human(wait), std::string(status.message()));
  return pause_.wait(wait) && (generation == 0 || session_.is_current(generation));
}

bool Conversation::may_ask() {
  const bool full = parties_.outbox.size() >= options_.most_waiting;
  if (full_.exchange(full) != full && full) {
    spdlog::error("{} reports wait in the spool, and no more runs are taken until the coordinator has them",
                  parties_.outbox.size());
  }
  return !full && !drained_ && !stopping_;
}

void Conversation::lease_loop() {
  while (!stopping_ && !pause_.ended()) {
    const std::optional<SessionView> session = session_.wait(kLook);
    if (!session) continue;
    if (!may_ask()) {
      pause_.wait(std::min(session->renew_every, kLook));
      continue;
    }
    if (parties_.outbox.size() > 0) parties_.outbox.wait_until_empty(kLook);  // a report asks for runs, too
    const int promised = parties_.roster.promise();
    if (promised == 0) {
      parties_.roster.wait_for_slot(kLook);
      continue;
    }
    lease_once(*session, promised);
    parties_.roster.release(promised);
  }
  leases_ended_ = true;
}

void Conversation::lease_once(const SessionView& session, int promised) {
  const absl::StatusOr<v1::LeaseResponse> answer = ask_for_runs(session, promised);
  if (answer.ok()) take_grants(answer->grants(), session);
}

absl::StatusOr<v1::LeaseResponse> Conversation::ask_for_runs(const SessionView& session, int want) {
  v1::LeaseRequest request;
  request.set_request_id(options_.fresh_id());
  request.set_session(session.token);
  request.set_want(want);
  *request.mutable_wait() = link::to_proto(std::min(options_.times.poll, session.longest_wait));
  link::Backoff backoff = fresh_backoff();
  for (;;) {
    polling_ = !stopping_;
    if (!polling_) *request.mutable_wait() = link::to_proto(absl::ZeroDuration());  // the last question
    absl::StatusOr<v1::LeaseResponse> answer = parties_.coordinator.lease(request);
    const bool last = !polling_.exchange(false);
    if (answer.ok() || last) return answer;
    if (stopping_) continue;  // a poll that was ended may have been granted something at that moment: asked once more
    if (!repeat("Lease", answer.status(), backoff, session.generation)) return answer;
  }
}

void Conversation::take_grants(const google::protobuf::RepeatedPtrField<v1::Grant>& grants,
                               const SessionView& session) {
  for (const v1::Grant& grant : grants) {
    if (!session_.is_current(session.generation)) {
      spdlog::info("a grant of an earlier session is passed over run={} attempt={} study={}", grant.run(),
                   grant.fence(), grant.study());
      continue;
    }
    const Identity known = parties_.spool.identity();
    if (grant.store_id() != known.store_id || grant.term() < known.term) {
      spdlog::error(
          "a grant is refused: it is of store {} term {}, and this worker serves store {} term {} "
          "run={} attempt={} study={}",
          grant.store_id(), grant.term(), known.store_id, known.term, grant.run(), grant.fence(), grant.study());
      continue;
    }
    if (const absl::Status taken = parties_.hands.take(grant); !taken.ok()) {
      // The next roll call, which lacks it, gives it back.
      spdlog::error(
          "a grant could not be written down and is given back by enrolling again: {} run={} attempt={} "
          "study={}",
          std::string(taken.message()), grant.run(), grant.fence(), grant.study());
      pause_.wait(options_.times.disk_retry);
      session_.lost(session.generation);
      return;
    }
  }
}

void Conversation::renew_loop() {
  while (!pause_.ended()) {
    const std::optional<SessionView> session = session_.get();
    if (!session) {
      const absl::Status status = enrol();
      if (!status.ok() && !pause_.ended()) {
        spdlog::error("enrolment was refused; what runs goes on, and results stay in the spool: {}",
                      std::string(status.message()));
        pause_.wait(options_.times.retry_most);
      }
      continue;
    }
    if (!session_.wait_until_lost(jittered(session->renew_every)) && !pause_.ended()) renew_once(*session);
  }
}

void Conversation::renew_once(const SessionView& session) {
  link::Backoff backoff = fresh_backoff();
  for (;;) {
    v1::RenewRequest request;
    request.set_session(session.token);
    for (const auto& [key, attempt] : parties_.roster.all()) {
      v1::AttemptStatus& status = *request.add_attempts();
      status.set_run(key.run);
      status.set_fence(key.fence);
      status.set_state(state_of(attempt.phase));
      if (attempt.phase != Phase::kRunning) continue;
      *status.mutable_elapsed() = link::to_proto(parties_.clock.steady() - attempt.since);
    }
    const absl::StatusOr<v1::RenewResponse> answer = parties_.coordinator.renew(request);
    if (!answer.ok()) {
      if (repeat("Renew", answer.status(), backoff, session.generation)) continue;
      return;
    }
    if (drained_.exchange(answer->drain()) != answer->drain()) {
      spdlog::info("{}", answer->drain() ? "the coordinator drains this worker: no more runs" : "no longer drained");
    }
    for (const v1::AttemptOrder& order : answer->orders()) {
      if (order.order() == v1::AttemptOrder::ORDER_STOP) {
        parties_.hands.stop({order.run(), order.fence()}, order.reason());
      }
    }
    return;
  }
}

void Conversation::end_leases(absl::Duration limit) {
  stopping_ = true;
  parties_.roster.close();
  const absl::Duration until = parties_.clock.steady() + limit;
  while (!leases_ended_ && parties_.clock.steady() < until) {
    if (polling_) parties_.coordinator.end_polls();  // again, since the call may only just have begun
    if (!pause_.wait(kAskAgain)) return;
  }
}

void Conversation::end() {
  stopping_ = true;
  pause_.end();
  session_.end_waits();
  parties_.outbox.close();
  parties_.roster.close();
  parties_.coordinator.abandon();
}

}  // namespace drover::session
