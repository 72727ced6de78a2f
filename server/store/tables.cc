#include "store/tables.h"

#include "status/try.h"
#include "store/chain.h"

namespace drover::store {
namespace {

absl::Status set_pools(Prepared& sql, const study::LicencePoolsSet& pools) {
  DROVER_TRY(sql["DELETE FROM licence_pool"].run());
  const std::map<std::string, std::int32_t> sorted(pools.counts().begin(), pools.counts().end());
  for (const auto& [name, count] : sorted) {
    Statement& insert = sql["INSERT INTO licence_pool(name, count) VALUES (?1, ?2)"];
    DROVER_TRY(insert.bind(1, name).bind(2, std::int64_t{count}).run());
  }
  return absl::OkStatus();
}

absl::Status define_code(Prepared& sql, const v1::CodeDefinition& code, std::int64_t number) {
  Statement& insert = sql["INSERT INTO code_definition(digest, name, nth, bytes) VALUES (?1, ?2, ?3, ?4)"];
  return insert.bind(1, code.digest()).bind(2, code.name()).bind(3, number).bind_bytes(4, canonical(code)).run();
}

absl::Status open_session(Prepared& sql, const study::SessionOpened& opened) {
  DROVER_TRY(sql["UPDATE session SET newest = 0 WHERE worker = ?1 AND newest = 1"].bind(1, opened.worker()).run());
  Statement& insert = sql[R"sql(
      INSERT INTO session(id, token, worker, host, version, boot, incarnation, slots, fleet_job, opened, newest)
      VALUES (?1, ?2, ?3, ?4, ?5, ?6, ?7, ?8, ?9, ?10, 1))sql"];
  insert.bind(1, opened.session()).bind(2, opened.token()).bind(3, opened.worker()).bind(4, opened.host());
  insert.bind(5, opened.version()).bind(6, opened.boot_id()).bind(7, opened.incarnation());
  return insert.bind(8, std::int64_t{opened.slots()})
      .bind(9, opened.fleet_job())
      .bind_bytes(10, canonical(opened))
      .run();
}

absl::Status store_request(Prepared& sql, const study::Answered& answered, std::int64_t number) {
  Statement& insert = sql["INSERT INTO request(id, principal, digest, event) VALUES (?1, ?2, ?3, ?4)"];
  insert.bind(1, answered.request_id()).bind(2, answered.principal()).bind_bytes(3, answered.digest());
  return insert.bind(4, number).run();
}

}  // namespace

absl::Status apply_to_tables(Prepared& sql, const study::Event& event, std::int64_t number) {
  using study::Event;
  switch (event.kind_case()) {
    case Event::kStoreCreated:
      return sql["INSERT INTO store(one, id, term) VALUES (1, ?1, 0)"].bind(1, event.store_created().store_id()).run();
    case Event::kTermBegun:
      return sql["UPDATE store SET term = ?1 WHERE term < ?1"].bind(1, event.term_begun().term()).run_on_one("a term");
    case Event::kLicencePoolsSet:
      return set_pools(sql, event.licence_pools_set());
    case Event::kCodeDefined:
      return define_code(sql, event.code_defined().definition(), number);
    case Event::kSessionOpened:
      return open_session(sql, event.session_opened());
    case Event::kAnswered:
      return store_request(sql, event.answered(), number);
    case Event::kStudyStarted:
    case Event::kStudyChanged:
    case Event::kAsksIssued:
    case Event::kCandidateLearned:
      DROVER_TRY(apply_to_studies(sql, event, number));
      break;
    case Event::KIND_NOT_SET:
      return absl::InternalError("an event says nothing");
    default:
      DROVER_TRY(apply_to_attempts(sql, event, number));
      break;
  }
  if (event.study() == 0) return absl::OkStatus();  // refused: no run of ours
  return sql["UPDATE study SET revision = ?1 WHERE id = ?2"]
      .bind(1, number)
      .bind(2, event.study())
      .run_on_one("a study");
}

}  // namespace drover::store
