#include "engine/islands.h"

#include <algorithm>
#include <boost/graph/adjacency_list.hpp>
#include <boost/graph/breadth_first_search.hpp>
#include <boost/graph/connected_components.hpp>
#include <boost/graph/kruskal_min_spanning_tree.hpp>
#include <cmath>
#include <iterator>

namespace engine {
namespace {

// A coupling below this part of the diagonal of its Maxwell matrix is none: to earth inside a metal
// raceway, where the row sum is zero but for rounding, or to a wire behind a screen.
constexpr double k_no_coupling = 1e-12;

struct Connection {
  double impedance = 0.0;  // ohm, magnitude
  Complex rise;            // V of the edge's source above its target
  int above = 0;           // node at the higher end of `rise`
};

using Graph =
    boost::adjacency_list<boost::vecS, boost::vecS, boost::undirectedS, boost::no_property, Connection>;
using Edge = boost::graph_traits<Graph>::edge_descriptor;

Graph strong_connections(const FlatNetwork& network) {
  Graph graph(network.node_count);
  for (const Section& section : network.sections) {
    const auto from = network.from(section), to = network.to(section);
    for (int i = 0; i < section.size(); ++i)
      if (from[i] != to[i])
        boost::add_edge(from[i], to[i], {1 / std::abs(section.blocks->series(i, i)), Complex{}, from[i]},
                        graph);
  }
  for (const Branch& branch : network.branches)
    if (branch.a != branch.b && std::abs(branch.admittance) >= k_strong)
      boost::add_edge(branch.a, branch.b, {1 / std::abs(branch.admittance), branch.emf, branch.a}, graph);
  return graph;
}

/// The spanning forest of strongest connections: a loop is left open at its weakest link, so that a
/// load, never a feeder, sees the difference of two no-load potentials.
Graph strongest_forest(const Graph& graph) {
  std::vector<Edge> edges;
  boost::kruskal_minimum_spanning_tree(graph, std::back_inserter(edges),
                                       boost::weight_map(boost::get(&Connection::impedance, graph)));
  Graph forest(boost::num_vertices(graph));
  for (const Edge& edge : edges)
    boost::add_edge(boost::source(edge, graph), boost::target(edge, graph), graph[edge], forest);
  return forest;
}

/// Carries the offset from each node to the next one away from the root.
class CarryOffset : public boost::default_bfs_visitor {
 public:
  explicit CarryOffset(std::vector<Complex>& offset) : offset_(&offset) {}

  void tree_edge(const Edge& edge, const Graph& forest) {
    const auto near = boost::source(edge, forest), far = boost::target(edge, forest);
    const bool far_is_above = static_cast<int>(far) == forest[edge].above;
    (*offset_)[far] = (*offset_)[near] + (far_is_above ? forest[edge].rise : -forest[edge].rise);
  }

 private:
  std::vector<Complex>* offset_;
};

void carry_offsets(const Graph& forest, Islands& islands) {
  islands.offset.assign(islands.of_node.size(), Complex{});
  std::vector<boost::default_color_type> colours(islands.of_node.size());
  const auto colour_map =
      boost::make_iterator_property_map(colours.begin(), boost::get(boost::vertex_index, forest));
  boost::queue<std::size_t> queue;
  for (const int root : islands.root)
    boost::breadth_first_visit(forest, static_cast<std::size_t>(root), queue, CarryOffset(islands.offset),
                               colour_map);
}

/// Islands joined by whatever couples them, weak branches and shunts; the earth of a shunt is island 0.
boost::adjacency_list<boost::vecS, boost::vecS, boost::undirectedS> couplings(const FlatNetwork& network,
                                                                              const Islands& islands) {
  boost::adjacency_list<boost::vecS, boost::vecS, boost::undirectedS> graph(islands.root.size());
  const auto couple = [&](int a, int b) {
    if (a != b) boost::add_edge(a, b, graph);
  };
  for (const Branch& branch : network.branches)
    if (branch.admittance != Complex{}) couple(islands.of_node[branch.a], islands.of_node[branch.b]);
  for (const Section& section : network.sections) {
    const Eigen::MatrixXcd& shunt = section.blocks->half_shunt;
    for (const auto ends : {network.from(section), network.to(section)})
      for (int i = 0; i < section.size(); ++i) {
        const int island = islands.of_node[ends[i]];
        if (std::abs(shunt.row(i).sum()) > k_no_coupling * std::abs(shunt(i, i))) couple(island, 0);
        for (int j = 0; j < i; ++j)
          if (std::abs(shunt(i, j)) > k_no_coupling * std::sqrt(std::abs(shunt(i, i) * shunt(j, j))))
            couple(island, islands.of_node[ends[j]]);
      }
  }
  return graph;
}

}  // namespace

Islands find_islands(const FlatNetwork& network) {
  Islands islands;
  const Graph forest = strongest_forest(strong_connections(network));
  islands.of_node.resize(network.node_count);
  // Boost numbers components as it meets them, so node 0, earth, is in component 0.
  const int count = boost::connected_components(forest, islands.of_node.data());
  islands.root.assign(count, -1);
  for (int node = 0; node < network.node_count; ++node)
    if (int& root = islands.root[islands.of_node[node]]; root < 0) root = node;
  carry_offsets(forest, islands);

  const auto graph = couplings(network, islands);
  islands.group.resize(count);
  const int groups = boost::connected_components(graph, islands.group.data());
  islands.is_group_root.assign(count, false);
  std::vector<bool> met(groups, false);
  for (int island = 0; island < count; ++island) {
    islands.is_group_root[island] = !met[islands.group[island]];
    met[islands.group[island]] = true;
  }
  return islands;
}

}  // namespace engine
