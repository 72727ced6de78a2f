// Enrolment and its roll call.
#include <algorithm>
#include <utility>

#include "link/duration.h"
#include "link/status.h"
#include "session/conversation.h"
#include "spdlog/spdlog.h"
#include "status/try.h"

namespace drover::session {
namespace {

constexpr int kEntriesPerPage = 5'000;  // far below the limit of a message

// An attempt that was taken but not begun is about to begin, and is called running: were it called not begun, the
// coordinator would give its run to somebody else.
v1::RollState roll_state(Phase phase) {
  return phase <= Phase::kRunning ? v1::ROLL_STATE_RUNNING : v1::ROLL_STATE_ENDED;
}

}  // namespace

v1::EnrolRequest Conversation::introduction() const {
  v1::EnrolRequest request;
  const Identity identity = parties_.spool.identity();
  request.set_worker(options_.worker);
  request.set_host(options_.machine.host);
  request.set_version(options_.version);
  request.set_boot_id(options_.machine.boot_id);
  request.set_incarnation(identity.incarnation);
  request.set_slots(options_.slots);
  request.set_cores(options_.machine.cores);
  request.set_memory_bytes(options_.machine.memory_bytes);
  for (const std::string& tag : options_.tags) request.add_tags(tag);
  request.set_fleet_job(options_.fleet_job);
  if (identity.newest_receipt.event() > 0) *request.mutable_newest_receipt() = identity.newest_receipt;
  request.set_store_id(identity.store_id);
  request.set_term(identity.term);
  return request;
}

std::vector<v1::RollEntry> Conversation::roll_call() const {
  std::vector<v1::RollEntry> roll;
  for (const auto& [key, attempt] : parties_.roster.all()) {
    v1::RollEntry& entry = roll.emplace_back();
    entry.set_run(key.run);
    entry.set_fence(key.fence);
    entry.set_state(roll_state(attempt.phase));
  }
  return roll;
}

absl::StatusOr<v1::EnrolResponse> Conversation::send_page(const v1::EnrolRequest& request) {
  link::Backoff backoff = fresh_backoff();
  for (;;) {
    absl::StatusOr<v1::EnrolResponse> answer = parties_.coordinator.enrol(request);
    if (answer.ok() || !link::worth_repeating(answer.status())) return answer;
    if (!repeat("Enrol", answer.status(), backoff, 0)) return answer;
  }
}

absl::Status Conversation::enrol() {
  const std::int64_t generation = session_.begin();
  const std::vector<v1::RollEntry> roll = roll_call();
  v1::EnrolRequest page = introduction();
  *page.mutable_codes() = {codes_.begin(), codes_.end()};
  std::size_t sent = 0;
  do {
    page.set_request_id(options_.fresh_id());
    page.clear_roll_call();
    while (sent < roll.size() && page.roll_call_size() < kEntriesPerPage) *page.add_roll_call() = roll[sent++];
    page.set_roll_call_complete(sent == roll.size());
    DROVER_ASSIGN(const v1::EnrolResponse response, send_page(page));
    if (page.roll_call_complete()) return open(response, generation);
  } while (!pause_.ended());
  return absl::CancelledError("this worker is ending");
}

absl::Status Conversation::open(const v1::EnrolResponse& response, std::int64_t generation) {
  DROVER_TRY(parties_.spool.adopt(response.store_id(), response.term()));
  SessionView view{.token = response.session(), .generation = generation};
  if (response.has_renew_every() && link::from_proto(response.renew_every()) > absl::ZeroDuration()) {
    view.renew_every = link::from_proto(response.renew_every());
  }
  if (response.has_longest_wait()) view.longest_wait = link::from_proto(response.longest_wait());
  spdlog::info("enrolled worker={} store={} term={} incarnation={} attempts={}", options_.worker, response.store_id(),
               response.term(), parties_.spool.identity().incarnation, response.answers_size());
  for (const v1::RollAnswer& answer : response.answers()) obey(answer);
  session_.opened(view);
  return absl::OkStatus();
}

void Conversation::obey(const v1::RollAnswer& answer) {
  const Key key{answer.run(), answer.fence()};
  switch (answer.order()) {
    case v1::ROLL_ORDER_STOP:
      parties_.hands.stop(key, answer.reason());
      return;
    case v1::ROLL_ORDER_FORGET: {
      const std::optional<Attempt> attempt = parties_.roster.find(key);
      if (attempt && attempt->phase == Phase::kReady) parties_.hands.acknowledged(key);
      return;
    }
    default:  // keep, deliver and hold ask for nothing but what happens anyway; so does what later versions may say
      return;
  }
}

}  // namespace drover::session
