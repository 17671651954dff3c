#include "engine/elimination_order.h"

#include <amd.h>

#include <algorithm>
#include <stdexcept>

namespace engine {
namespace {

/// The group of each unknown, from 0 without gaps: each block splits off from every class what it holds of
/// it.
std::vector<int> groups_of(int size, const BlockPattern& pattern, int& count) {
  std::vector<int> group(size, 0), split_by{-1}, split_into{0};
  for (int block = 0; block < pattern.count(); ++block) {
    for (int p = pattern.begin[block]; p < pattern.begin[block + 1]; ++p) {
      const int old = group[pattern.unknowns[p]];
      if (split_by[old] != block) {
        split_by[old] = block;
        split_into[old] = static_cast<int>(split_by.size());
        split_by.push_back(-1);
        split_into.push_back(0);
      }
      group[pattern.unknowns[p]] = split_into[old];
    }
  }
  std::vector<int> dense(split_by.size(), -1);
  count = 0;
  for (int& of : group) {
    if (dense[of] < 0) dense[of] = count++;
    of = dense[of];
  }
  return group;
}

/// The groups that share a block, as AMD takes them: columns of row numbers, in no order, repeated at will.
void group_graph(const BlockPattern& pattern, const std::vector<int>& group, int count,
                 std::vector<int>& begin, std::vector<int>& rows) {
  std::vector<int> block_begin{0}, members, met(count, -1);
  std::vector<std::size_t> degree(count + 1, 0);
  for (int block = 0; block < pattern.count(); ++block) {
    for (int p = pattern.begin[block]; p < pattern.begin[block + 1]; ++p) {
      const int of = group[pattern.unknowns[p]];
      if (met[of] == block) continue;
      met[of] = block;
      members.push_back(of);
    }
    const int first = block_begin.back(), last = static_cast<int>(members.size());
    for (int p = first; p < last; ++p) degree[members[p] + 1] += last - first;
    block_begin.push_back(last);
  }
  for (int i = 0; i < count; ++i) degree[i + 1] += degree[i];
  if (degree[count] > 2147483647) throw std::runtime_error("ordering the network: the matrix is too large");
  begin.assign(degree.begin(), degree.end());
  rows.resize(degree[count]);
  std::vector<int> next(begin.begin(), begin.end() - 1);
  for (int block = 0; block < pattern.count(); ++block)
    for (int p = block_begin[block]; p < block_begin[block + 1]; ++p)
      for (int q = block_begin[block]; q < block_begin[block + 1]; ++q) rows[next[members[p]]++] = members[q];
}

}  // namespace

EliminationOrder elimination_order(int size, const BlockPattern& pattern) {
  int count = 0;
  const std::vector<int> group = groups_of(size, pattern, count);
  std::vector<int> begin, rows, order(count);
  group_graph(pattern, group, count, begin, rows);
  const int status = amd_order(count, begin.data(), rows.data(), order.data(), nullptr, nullptr);
  if (status != AMD_OK && status != AMD_OK_BUT_JUMBLED)
    throw std::runtime_error("ordering the network: out of memory");
  EliminationOrder result;
  std::vector<int> rank(count), sizes(count + 1, 0);
  for (int i = 0; i < count; ++i) rank[order[i]] = i;
  for (const int of : group) ++sizes[rank[of] + 1];
  for (int i = 0; i < count; ++i) sizes[i + 1] += sizes[i];
  result.begin = sizes;
  result.place.resize(size);
  for (int unknown = 0; unknown < size; ++unknown) result.place[unknown] = sizes[rank[group[unknown]]]++;
  return result;
}

}  // namespace engine
