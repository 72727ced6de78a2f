// The arithmetic of a score: how values under many conditions become one, and how far one lies beyond its limits.
//
// Pure functions; sums run in the order of the cells, so that the same numbers give the same bits.
#pragma once

#include <limits>
#include <span>

#include "drover/v1/study.pb.h"

namespace drover::study {

// low <= value <= high; an infinite end is no limit.
struct Limits {
  double low = -std::numeric_limits<double>::infinity();
  double high = std::numeric_limits<double>::infinity();
};

// A constraint's limits with its allowance kept back: each moves to the safe side by allowance x |limit|. 5 % turn "at
// most 1.6" into 1.52, "at least 10" into 10.5, "at most -2" into -2.1 and "at least -2" into -1.9.
Limits tightened(const v1::Constraint& constraint);

// What violations are divided by where the constraint names no scale: the larger limit's size, or 1 for a limit of 0.
double usual_scale(const v1::Constraint& constraint);

// How far `value` lies outside; negative inside (the way to the nearer limit).
double excess(const Limits& limits, double value);

// `values` and `weights` have one number a cell, at least one; weights are 0 or more and add up to 1.
double weighted_mean(std::span<const double> values, std::span<const double> weights);

// The largest of what is minimised, the smallest of what is maximised.
double worst(std::span<const double> values, v1::Sense sense);

// The least bad value such that the values as bad or worse weigh at least `q`, in (0, 1): the inverse of the weighted
// empirical distribution from the bad side (definition 1 of Hyndman and Fan 1996, The American Statistician 50,
// 361-365).
double weighted_quantile(std::span<const double> values, std::span<const double> weights, double q, v1::Sense sense);

}  // namespace drover::study
