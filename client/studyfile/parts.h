// The parts of a study file, each read by one function. Internal to this folder.
#pragma once

#include "drover/v1/study.pb.h"
#include "studyfile/table_reader.h"

namespace drover::studyfile {

// inputs.cc
void read_variable(TableReader& table, v1::Variable& variable);
void read_condition(TableReader& table, v1::Condition& condition);
// measures.cc
void read_derived(TableReader& table, v1::Derived& derived);
void read_objective(TableReader& table, v1::Objective& objective);
void read_constraint(TableReader& table, v1::Constraint& constraint);
// settings.cc
void read_study(TableReader& table, v1::StudySpec& spec);
void read_search(TableReader& table, v1::SearchSpec& search);
void read_budget(TableReader& table, v1::Budget& budget);

}  // namespace drover::studyfile
