// Events of runs and attempts. States change by guarded updates whose row count is checked.
#include "absl/strings/str_cat.h"
#include "status/try.h"
#include "store/chain.h"
#include "store/tables.h"
#include "study/bytes.h"

namespace drover::store {
namespace {

using study::Event;

absl::Status grant(Prepared& sql, const study::Granted& granted) {
  Statement& fence = sql["UPDATE run SET fence = ?1 WHERE id = ?2 AND life = 'open' AND fence < ?1"];
  DROVER_TRY(fence.bind(1, granted.fence()).bind(2, granted.run()).run_on_one("a run's fence"));
  Statement& attempt = sql[R"sql(
      INSERT INTO attempt(run, fence, session, worker, state)
      VALUES (?1, ?2, ?3, (SELECT worker FROM session WHERE id = ?3), 'granted'))sql"];
  DROVER_TRY(attempt.bind(1, granted.run()).bind(2, granted.fence()).bind(3, granted.session()).run());
  for (const auto& [pool, n] :
       std::map<std::string, std::int32_t>(granted.licences().begin(), granted.licences().end())) {
    Statement& hold = sql["INSERT INTO licence_hold(run, fence, pool, n) VALUES (?1, ?2, ?3, ?4)"];
    DROVER_TRY(hold.bind(1, granted.run()).bind(2, granted.fence()).bind(3, pool).bind(4, std::int64_t{n}).run());
  }
  return absl::OkStatus();
}

// The attempt's new state; it must be open.
absl::Status set_state(Prepared& sql, std::int64_t run, std::int64_t fence, std::string_view state) {
  Statement& update = sql[R"sql(
      UPDATE attempt SET state = ?1
      WHERE run = ?2 AND fence = ?3 AND state IN ('granted', 'begun', 'parked', 'stopping'))sql"];
  return update.bind(1, state).bind(2, run).bind(3, fence).run_on_one(
      absl::StrCat("an attempt that is ", std::string(state)));
}

absl::Status hear(Prepared& sql, const study::Heard& heard) {
  Statement& update = sql[R"sql(
      UPDATE attempt
      SET session = ?1, released = CASE state WHEN 'stopping' THEN released ELSE 0 END,
          state = CASE state WHEN 'stopping' THEN 'stopping' ELSE ?2 END
      WHERE run = ?3 AND fence = ?4 AND state IN ('granted', 'begun', 'parked', 'stopping'))sql"];
  update.bind(1, heard.session()).bind(2, heard.begun() ? std::string_view("begun") : std::string_view("granted"));
  return update.bind(3, heard.run()).bind(4, heard.fence()).run_on_one("an attempt that is heard");
}

absl::Status free_licences(Prepared& sql, std::int64_t run, std::int64_t fence) {
  return sql["DELETE FROM licence_hold WHERE run = ?1 AND fence = ?2"].bind(1, run).bind(2, fence).run();
}

// The attempt's end. A late report may end one that was booked as lost or handed back before.
absl::Status end_attempt(Prepared& sql, std::int64_t run, std::int64_t fence, std::string_view state,
                         const v1::AttemptReport& report, std::int64_t number) {
  Statement& update = sql[R"sql(
      UPDATE attempt SET state = ?1, reason = ?2, abnormal = ?3, report = ?4, end_event = ?5
      WHERE run = ?6 AND fence = ?7 AND state NOT IN ('settled', 'duplicate'))sql"];
  update.bind(1, state).bind(2, report.reason()).bind(3, std::int64_t{report.abnormal()});
  update.bind_bytes(4, canonical(report)).bind(5, number).bind(6, run).bind(7, fence);
  DROVER_TRY(update.run_on_one(absl::StrCat("an attempt that is ", std::string(state))));
  return free_licences(sql, run, fence);
}

absl::Status hand_back(Prepared& sql, const study::HandedBack& back, std::int64_t number) {
  Statement& update = sql[R"sql(
      UPDATE attempt SET state = 'handed_back', reason = ?1, end_event = ?2
      WHERE run = ?3 AND fence = ?4 AND state IN ('granted', 'begun', 'parked', 'stopping'))sql"];
  update.bind(1, back.reason()).bind(2, number).bind(3, back.run()).bind(4, back.fence());
  DROVER_TRY(update.run_on_one("an attempt that is handed back"));
  return free_licences(sql, back.run(), back.fence());
}

absl::Status count_end(Prepared& sql, std::int64_t run) {
  Statement& count = sql[R"sql(
      UPDATE candidate SET ended = ended + 1
      WHERE (study, number) = (SELECT study, candidate FROM run WHERE id = ?1) AND ended < runs)sql"];
  return count.bind(1, run).run_on_one("a candidate's ended runs");
}

std::int64_t microseconds(const google::protobuf::Duration& span) {
  return span.seconds() * 1'000'000 + span.nanos() / 1000;
}

absl::Status settle(Prepared& sql, const Event& event, std::int64_t number) {
  const study::Settled& settled = event.settled();
  const v1::AttemptReport& report = settled.report();
  Statement& run = sql[R"sql(
      UPDATE run SET life = 'settled', settling = ?1, bound = ?2, reason = ?3
      WHERE id = ?4 AND life IN ('open', 'set_aside'))sql"];
  run.bind(1, settled.fence()).bind(2, std::int64_t{report.bound()}).bind(3, report.reason()).bind(4, settled.run());
  DROVER_TRY(run.run_on_one("a run that settles"));
  DROVER_TRY(end_attempt(sql, settled.run(), settled.fence(), "settled", report, number));
  for (const v1::OutputValue& output : report.outputs()) {
    Statement& row = sql["INSERT INTO output(run, name, value, variance) VALUES (?1, ?2, ?3, ?4)"];
    row.bind(1, settled.run()).bind(2, output.name()).bind_bytes(3, study::pack_double(output.value()));
    if (output.has_variance()) {
      row.bind_bytes(4, study::pack_double(output.variance()));
    } else {
      row.bind_null(4);
    }
    DROVER_TRY(row.run());
  }
  const bool evaluated = report.ending() == v1::ENDING_EVALUATED;
  Statement& count = sql[R"sql(
      UPDATE study SET evaluated = evaluated + ?1, failed = failed + ?2, wall_us = wall_us + ?3 WHERE id = ?4)sql"];
  count.bind(1, std::int64_t{evaluated}).bind(2, std::int64_t{!evaluated});
  count.bind(3, microseconds(report.usage().wall())).bind(4, event.study());
  DROVER_TRY(count.run_on_one("a study's counts"));
  return count_end(sql, settled.run());
}

absl::Status withdraw(Prepared& sql, const Event& event) {
  Statement& run = sql["UPDATE run SET life = 'withdrawn' WHERE id = ?1 AND life IN ('open', 'set_aside')"];
  DROVER_TRY(run.bind(1, event.withdrawn().run()).run_on_one("a run that is withdrawn"));
  DROVER_TRY(sql["UPDATE study SET withdrawn = withdrawn + 1 WHERE id = ?1"].bind(1, event.study()).run());
  return count_end(sql, event.withdrawn().run());
}

absl::Status lose(Prepared& sql, const Event& event, std::int64_t number) {
  const study::AttemptLost& lost = event.attempt_lost();
  DROVER_TRY(sql["UPDATE study SET lost = lost + 1 WHERE id = ?1"].bind(1, event.study()).run());
  return end_attempt(sql, lost.run(), lost.fence(), "lost", lost.report(), number);
}

absl::Status release(Prepared& sql, const study::Released& released) {
  Statement& update = sql["UPDATE attempt SET released = 1 WHERE run = ?1 AND fence = ?2 AND end_event = 0"];
  return update.bind(1, released.run()).bind(2, released.fence()).run_on_one("an attempt that is released");
}

absl::Status set_aside(Prepared& sql, const study::SetAside& aside) {
  Statement& update = sql["UPDATE run SET life = 'set_aside', reason = ?1 WHERE id = ?2 AND life = 'open'"];
  return update.bind(1, aside.reason()).bind(2, aside.run()).run_on_one("a run that is set aside");
}

}  // namespace

absl::Status apply_to_attempts(Prepared& sql, const Event& event, std::int64_t number) {
  switch (event.kind_case()) {
    case Event::kGranted:
      return grant(sql, event.granted());
    case Event::kBegun:
      return set_state(sql, event.begun().run(), event.begun().fence(), "begun");
    case Event::kParked:
      return set_state(sql, event.parked().run(), event.parked().fence(), "parked");
    case Event::kStopAsked:
      return set_state(sql, event.stop_asked().run(), event.stop_asked().fence(), "stopping");
    case Event::kHeard:
      return hear(sql, event.heard());
    case Event::kHandedBack:
      return hand_back(sql, event.handed_back(), number);
    case Event::kReleased:
      return release(sql, event.released());
    case Event::kAttemptLost:
      return lose(sql, event, number);
    case Event::kSettled:
      return settle(sql, event, number);
    case Event::kDuplicate:
      return end_attempt(sql, event.duplicate().run(), event.duplicate().fence(), "duplicate",
                         event.duplicate().report(), number);
    case Event::kRefused:
      return absl::OkStatus();  // the event row itself is the record
    case Event::kWithdrawn:
      return withdraw(sql, event);
    case Event::kSetAside:
      return set_aside(sql, event.set_aside());
    case Event::kLicencesReleased:
      return free_licences(sql, event.licences_released().run(), event.licences_released().fence());
    default:
      return absl::InternalError(absl::StrCat("event kind ", event.kind_case(), " is none of an attempt"));
  }
}

}  // namespace drover::store
