// Questions that are asked for every request or at every start read by key: none walks a table that grows with settled
// runs.
#include "store/queries.h"

#include <gtest/gtest.h>
#include <sqlite3.h>

#include <string>
#include <vector>

#include "server/store/made_events.h"
#include "store/connection.h"
#include "store/folder.h"

namespace drover::store {
namespace {

std::string plan_of(Connection& connection, const std::string& sql) {
  Statement explain(connection, "EXPLAIN QUERY PLAN " + sql);
  std::string plan;
  while (explain.next()) plan += explain.text(3) + "\n";
  EXPECT_TRUE(explain.end().ok()) << sql;
  return plan;
}

TEST(Queries, ReadByKey) {
  const TestFolder folder;
  { ASSERT_TRUE(store_with_study(folder.path()).ok()); }
  auto connection = Connection::open(folder.path() + "/" + kDatabaseFile, Connection::Kind::kReader, "");
  ASSERT_TRUE(connection.ok());
  const std::vector<std::string> asked = {
      "SELECT r.principal, r.digest, e.bytes FROM request AS r JOIN event AS e ON e.number = r.event WHERE r.id = ?1",
      "SELECT " + run_columns() + " FROM run AS r WHERE r.life IN ('open', 'set_aside')",
      "SELECT " + run_columns() +
          " FROM attempt AS a JOIN run AS r ON r.id = a.run WHERE a.state IN ('granted', 'begun', 'parked', "
          "'stopping')",
      "SELECT " + candidate_columns() + " FROM candidate AS c WHERE c.study = ?1 AND c.score IS NULL ORDER BY number",
      "SELECT l.position, c.score FROM learned AS l JOIN candidate AS c ON c.study = l.study AND c.number = "
      "l.candidate WHERE l.study = ?1 AND l.position > ?2 ORDER BY l.position LIMIT ?3",
      "SELECT max(id) FROM run",
      "SELECT opened FROM session WHERE newest = 1",
      "SELECT hash FROM event WHERE number = ?1"};
  for (const std::string& sql : asked) {
    const std::string plan = plan_of(**connection, sql);
    for (const char* const table :
         {"SCAN event", "SCAN e\n", "SCAN request", "SCAN c\n", "SCAN l\n", "SCAN a\n", "SCAN r\n"}) {
      EXPECT_EQ(plan.find(table), std::string::npos) << sql << "\n" << plan;
    }
  }
}

}  // namespace
}  // namespace drover::store
