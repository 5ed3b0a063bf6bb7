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
// The line printed is "optimum seconds peak": the optimum as a whole number;
// seconds to hand the finished graph to the solver and to run it; and KiB of
// memory the process grew by in that. Reading the file and building LEMON's
// graph are not counted. A run of less than 0.1 s warms the process up: then as
// many more as fit in 0.2 s are timed, and their median is printed.

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
  std::string optimum;
  long peak = 0;
  std::vector<double> times;
  const double begin = seconds();
  do {
    const double start = seconds();
    Solver solver(in.graph);
    solver.costMap(in.cost).supplyMap(in.supply);
    const auto status = solver.run();  // block search, or partial augmentation: the defaults
    const double took = seconds() - start;
    if (status != Solver::OPTIMAL) {
      std::fprintf(stderr, "no optimum: %s\n", status == Solver::INFEASIBLE ? "infeasible" : "unbounded");
      return 1;
    }
    if (optimum.empty()) {
      peak = memory("VmHWM:");
      optimum = decimal(solver.template totalCost<__int128>());
      if (took < 0.1) continue;  // a warm-up
    }
    times.push_back(took);
  } while (times.empty() || seconds() - begin < 0.2);
  std::sort(times.begin(), times.end());
  std::printf("%s %.6f %ld\n", optimum.c_str(), times[times.size() / 2], peak - before);
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
