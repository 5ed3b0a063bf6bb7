package main

const mainHelp = `barrow measures how far apart distributions on one network are: vehicles over
streets, megawatts over buses, cells over a neighbour graph. The distance is how
far mass must move along the network to turn one sample into another (earth
mover's or Wasserstein-1 distance), and it comes with a statement of its error.

Usage
  barrow COMMAND [flags]

Commands
  inspect    describe a network and its samples, and list every problem found
  matrix     distances between all samples
  pair A B   compare two samples: distance, proof, flow on every edge
  demo DIR   write an invented town and run the main job on it
  help       this text; barrow help COMMAND or barrow COMMAND --help for more
  version    which barrow this is

Start here
  barrow demo harbour

Exit codes
  0 done, 1 failed, 2 bad usage or bad input, 130 interrupted

Distances describe data. They are no diagnosis and no operating instruction for a
grid or a road: local codes, operators and licensed practitioners decide.
`

const inputHelp = `
Input
  --edges FILE          from,to,length[,weight][,oneway]; lengths above 0 in any
                        unit, which becomes the unit of the distances. Without
                        a weight it is 1/length
  --nodes FILE          node[,x,y] or node[,lon,lat] and [,district]; optional
  --samples FILE        sample,node,value; or a column node and a column for
                        each sample; or Matrix Market (.mtx) or NumPy (.npy)
  --rows FILE           names of the rows of a .mtx or .npy, a name a line
  --columns FILE        names of its columns; one names nodes, one samples
  --directed            honour one-way edges (column oneway, or all)
  --length-from HOW     lengths from weights: inverse (1/weight) or neglog
                        (-ln weight)
  --bridge LENGTH       join the parts of a network that is not connected
  --missing zero        take a missing value as no mass (else it is refused)
  Files may be separated by commas, tabs or semicolons, and be .gz or .zst.
`

const inspectHelp = `barrow inspect describes a network and its samples: counts, parts, lengths,
degrees, masses, and every problem found. It writes no file.

Example
  barrow inspect --edges harbour/edges.csv --nodes harbour/nodes.csv --samples harbour/samples.csv --groups harbour/groups.csv
` + inputHelp + `
Labels
  --groups FILE         sample,<any columns>: labels of samples

Exit codes
  0 no problem found, 2 problems (listed on stdout) or bad usage
`

const comparisonHelp = `
Comparison
  --mass share|amount   compare samples divided by their totals (share, the
                        default: distances are how far a unit of mass moves on
                        average) or as they are (amount: mass times length)
  --unmatched COST      let mass be created or removed at this cost a unit, in
                        the unit of length; 0, the default, does not. For
                        amounts of different totals
`

const replayHelp = `
Repeating
  --replay run.json     repeat a recorded run with all its parameters, and refuse
                        inputs whose checksum differs. Without --out nothing is
                        kept: results are compared with the record, and other
                        bytes are an error
`

const runHelp = `
Running
  --threads N           goroutines; 0, the default, is all processors. Results
                        do not depend on it
  --memory SIZE         refuse a job that needs more, like 8GiB or 500MB; 4GiB by
                        default, 0 for no limit
`

const holdHelp = `  --hold auto|memory|disk
                        where the vectors of the samples are kept: auto puts them
                        on disk beside --out when they do not fit --memory.
                        Results do not depend on it
`

const matrixHelp = `barrow matrix finds the distance between every two samples, and says how wrong the
distances can be.

Example
  barrow matrix --edges harbour/edges.csv --nodes harbour/nodes.csv --samples harbour/samples.csv --out town
` + inputHelp + `
Method
  --method multiscale   estimates from how mass diffuses and flows, fast (the
                        default). Calibrated, they have the unit of your edge
                        lengths
           exact        every pair solved and proved; honours one-way edges
           flow         an upper bound of every distance, proved, without solving
                        any pair
           hierarchy    along a spanning tree: the cheapest that knows lengths,
                        and exact where the network is a tree
           kernel       maximum mean discrepancy under heat kernels; no unit
           variation    half the sum of differences, blind to where nodes lie
  --calibrate N         solve N random pairs exactly, fit the estimates on half
                        of them and report the error on the rest. auto, the
                        default: up to 200; 0: none, and numbers have no unit
  --calibration FILE    use the calibration.json of an earlier run on this
                        network instead: further samples compare as if they had
                        been there
  --vectors             write the vector of each sample as well, such that the L1
                        distance of two is the estimate, for your own index or
                        classifier. Estimates then leave out the term of the
                        proofs, which is no L1 distance, and are a little worse
  --seed N              of the choice of those pairs; 1 by default
` + comparisonHelp + runHelp + holdHelp + replayHelp + `
Results
  --out DIR             where they go, "results" by default:
                          matrix.csv       square, labelled; from row to column
                          pairs.csv        a,b,distance,lower,upper,method; lower
                                           and upper empty where nothing is proved
                          calibration.csv  the pairs that were solved exactly
                          calibration.json what --calibration takes
                          vectors.npy      (--vectors) a row of float32 a sample
                          vectors.json     (--vectors) names of the rows, unit
                          run.json         what was run, on what, and what it took
                        They appear together at the end, or not at all
  --replace             write over results of another run in DIR. Without it they
                        are refused, and those of the same run are kept as they are
`

const pairHelp = `barrow pair compares two samples: how far mass moves to turn A into B, along which
links, and the proof that no way is shorter.

Example
  barrow pair w1-thu-08 w2-thu-08 --edges harbour/edges.csv --samples harbour/samples.csv --out bridge
` + inputHelp + `
Method
  --method exact        solved and proved (the default); honours one-way edges
           multiscale   uncalibrated estimate, and a proved lower bound
           kernel       maximum mean discrepancy under heat kernels; no unit
           variation    half the sum of differences, blind to where nodes lie
  --gap G               let exact stop once (upper - lower) / upper is at most G,
                        like 0.01; 0, the default, goes on to the end
  --time-limit T        let exact stop after T, like 90s or 5m, and report the
                        interval proved by then; 0, the default, is no limit.
                        Ctrl-C shows it too, and writes nothing
` + comparisonHelp + replayHelp + `
Results
  --out DIR             where they go; without it nothing is written:
                          pairs.csv        a,b,distance,lower,upper,method
                          flows.csv        from,to,flow,cost: mass on each edge
                                           used, below 0 from to to from
                          potentials.csv   node,potential: the proof. It falls by no
                                           more than the length along any edge, and
                                           the sum of potential times (A - B) is the
                                           lower bound
                          unmatched.csv    node,removed (--unmatched; created
                                           where below 0)
                          run.json         what was run, on what, and what it took
  --replace             write over results of another run in DIR
`

const demoHelp = `barrow demo invents a harbour town, counts its traffic for two weeks with a bridge
closed in the second, writes that as input files, and runs matrix and pair on it.
It takes a few seconds and some 15 MB of disk.

Example
  barrow demo harbour

Flags
  --seed N              another town; 1 by default
  --threads N           goroutines; 0, the default, is all processors
  --replace             write over other files of the same names in DIR

Results
  DIR/edges.csv, nodes.csv, samples.csv, groups.csv   the town; lengths in metres
  DIR/results                                         barrow matrix on it
  DIR/bridge                                          barrow pair: one hour, both weeks
`
