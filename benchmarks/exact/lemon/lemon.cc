// Solves one transport instance with LEMON (Library for Efficient Modeling and
// Optimization in Networks) and prints the optimum, the time and the memory.
//
//   g++ -O3 -march=native -o lemon lemon.cc
//   ./lemon network-simplex|cost-scaling INSTANCE
//
// An instance is text: "nodes edges"; a line "from to length oneway" for each
// edge, all whole numbers, nodes from 0, oneway 0 or 1; then the supply of each
// node, a whole number, in sum 0.
//
// The line printed is "optimum solve prepare peak": the optimum as a whole
// number; seconds in run(); seconds before that to hand the finished graph to
// the solver; and KiB of memory the process grew by during both. Reading the
// file and building LEMON's graph are not counted.

#include <algorithm>
#include <chrono>
#include <cstdint>
#include <cstdio>
#include <cstring>
#include <string>
#include <vector>

#include <lemon/cost_scaling.h>
#include <lemon/network_simplex.h>
#include <lemon/smart_graph.h>

using lemon::SmartDigraph;

namespace {

double seconds() {
  using clock = std::chrono::steady_clock;
  return std::chrono::duration<double>(clock::now().time_since_epoch()).count();
}

// A line of the process's memory record in KiB, 0 where there is none.
long memory(const char* field) {
  std::FILE* status = std::fopen("/proc/self/status", "r");
  if (!status) return 0;
  char line[256];
  long kib = 0;
  while (std::fgets(line, sizeof line, status)) {
    if (std::strncmp(line, field, std::strlen(field)) == 0) {
      std::sscanf(line + std::strlen(field), "%ld", &kib);
    }
  }
  std::fclose(status);
  return kib;
}

// Lets the peak start again from the memory in use now (Linux).
void reset_peak() {
  if (std::FILE* refs = std::fopen("/proc/self/clear_refs", "w")) {
    std::fputs("5", refs);
    std::fclose(refs);
  }
}

std::string decimal(__int128 x) {
  if (x < 0) return "-" + decimal(-x);
  std::string digits;
  do {
    digits += static_cast<char>('0' + static_cast<int>(x % 10));
    x /= 10;
  } while (x > 0);
  std::reverse(digits.begin(), digits.end());
  return digits;
}

struct Instance {
  SmartDigraph graph;
  SmartDigraph::ArcMap<std::int64_t> cost{graph};
  SmartDigraph::NodeMap<std::int64_t> supply{graph};

  bool read(const char* path) {
    std::FILE* file = std::fopen(path, "r");
    if (!file) return false;
    long nodes, edges;
    bool ok = std::fscanf(file, "%ld %ld", &nodes, &edges) == 2;
    if (ok) {
      graph.reserveNode(nodes);
      graph.reserveArc(2 * edges);
      for (long v = 0; v < nodes; v++) graph.addNode();
    }
    for (long i = 0; ok && i < edges; i++) {
      long from, to, length, oneway;
      ok = std::fscanf(file, "%ld %ld %ld %ld", &from, &to, &length, &oneway) == 4 &&
           from >= 0 && from < nodes && to >= 0 && to < nodes;
      if (!ok) break;
      SmartDigraph::Node u = graph.nodeFromId(from), v = graph.nodeFromId(to);
      cost[graph.addArc(u, v)] = length;
      if (!oneway) cost[graph.addArc(v, u)] = length;
    }
    for (long v = 0; ok && v < nodes; v++) {
      long b;
      ok = std::fscanf(file, "%ld", &b) == 1;
      if (ok) supply[graph.nodeFromId(v)] = b;
    }
    std::fclose(file);
    return ok;
  }
};

template <typename Solver>
int solve(const Instance& in) {
  reset_peak();
  const long before = memory("VmRSS:");
  const double start = seconds();
  Solver solver(in.graph);
  solver.costMap(in.cost).supplyMap(in.supply);
  const double ready = seconds();
  const auto status = solver.run();  // block search, or partial augmentation: the defaults
  const double end = seconds();
  const long peak = memory("VmHWM:");
  if (status != Solver::OPTIMAL) {
    std::fprintf(stderr, "no optimum: %s\n", status == Solver::INFEASIBLE ? "infeasible" : "unbounded");
    return 1;
  }
  const std::string optimum = decimal(solver.template totalCost<__int128>());
  std::printf("%s %.6f %.6f %ld\n", optimum.c_str(), end - ready, ready - start, peak - before);
  return 0;
}

}  // namespace

int main(int argc, char** argv) {
  const std::string name = argc == 3 ? argv[1] : "";
  if (name != "network-simplex" && name != "cost-scaling") {
    std::fprintf(stderr, "usage: %s network-simplex|cost-scaling INSTANCE\n", argv[0]);
    return 2;
  }
  Instance in;
  if (!in.read(argv[2])) {
    std::fprintf(stderr, "%s: cannot be read as an instance\n", argv[2]);
    return 2;
  }
  if (name == "cost-scaling") return solve<lemon::CostScaling<SmartDigraph, std::int64_t, std::int64_t>>(in);
  return solve<lemon::NetworkSimplex<SmartDigraph, std::int64_t, std::int64_t>>(in);
}
