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
  rank Q     the samples nearest to one, proved
  test       do groups of samples differ by more than chance, and where
  noise      which distances are more than counting noise
  shape      a map, a tree and groups of the samples
  series     samples in order: steps, path, and where they break
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
           certified    every distance between two proved bounds; pairs are solved
                        only as far as the question below needs
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
  --gap G               certified: until (upper - lower) / upper of every pair is at
                        most G, 0.01 by default; or until
  --gap-mean G          the mean over all pairs is; or
  --top K               each sample's K nearest are proved; or
  --threshold X         it is proved which pairs are nearer than X
  --budget T            stop after T, like 5m, with the bounds reached
  --groups FILE --medoids-by COLUMN
                        also prove the middle sample of each group
  --add DIR             extend the results in DIR by the samples given: its own
                        samples come first, and nothing that it knows is done
                        again. Network and comparison are taken from there
  --noise               also what counting noise makes of every pair: columns
                        floor, excess and p of pairs.csv, see barrow help noise;
                        --draws N and --dispersion X as there
  --unbiased            of kernel: the square, without the bias that counting
                        gives it; 0 on average for counts of one source
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
  --groups FILE --by COLUMN
                        A and B are labels of this column: compare the means of
                        the two groups, with a 95 % interval from redrawing their
                        samples
  --draws N             redrawings; 199 by default
  --seed N              other redrawings; 1 by default
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
                          districts.csv    from,to,mass,cost[,cost_low,cost_high]:
                                           what moves from
                                           district to district; the costs add
                                           up to the distance. Without a column
                                           district in --nodes, parts of the
                                           network that barrow finds
                          corridors.csv    corridor,step,node,mass,length: the ten
                                           heaviest paths of edges
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

const testHelp = `barrow test asks whether groups of samples differ by more than chance, where, and
whether two matrices go together. Samples are exchanged as the design allows, and
what comes of it is compared with what was seen.

Example
  barrow test --edges harbour/edges.csv --samples harbour/samples.csv --groups harbour/groups.csv --by week --test energy,dispersion --out weeks
` + inputHelp + `
  --distances FILE      instead of these: a matrix.csv
  --groups FILE         sample, and any columns; a row for each sample

Question
  --by COLUMN,…         what tells the groups apart; several are tested in this
                        order (sequential sums of squares), A:B is an interaction
  --given COLUMN,…      fitted first and not tested: covariates
  --numbers COLUMN,…    columns that hold numbers, not labels
  --test NAME,…         pseudo-f     places (Anderson 2001); the default, with
                        energy       any difference (Székely & Rizzo 2013), and
                        dispersion   spread (Anderson 2006)
                        kernel       heat kernels at all scales (Gretton et al. 2012)
                        anosim       ranks (Clarke 1993)
  --pairs               also every two groups, with adjusted P
  --where WHAT          where they differ: districts, nodes, or scales (nodes
                        after diffusion too), with P adjusted over all places
                        (Westfall & Young 1993)
  --against FILE        does another matrix go with this one (Mantel 1967;
                        Procrustes); --without FILE takes a third one out

Design
  --blocks COLUMN       exchange within blocks only; pairs are blocks of two
  --plots COLUMN        exchange whole plots, for factors given to plots
  --shift               rotate the series instead, for samples in time order;
  --together            all blocks by the same amount
  --permutations N      999 by default; all rearrangements where they are fewer
  --stop N              stop once N reached what was seen; 0, the default, does not
  --level P             where P is called small, 0.05 by default
  --method NAME         how distances are made, see barrow help matrix
  --calibrate N|auto    pairs solved exactly for multiscale
  --seed N              another choice of permutations and pairs; 1 by default
` + comparisonHelp + runHelp + replayHelp + `
Results
  --out DIR             tests by default:
                          tests.csv        test,factor,statistic,p,p_error,…
                          comparisons.csv  every two groups (--pairs)
                          where.csv        place,statistic,p,adjusted,mean …
                          run.json         what was run, on what
  --replace             write over results of another run in DIR
`

const noiseHelp = `barrow noise asks which distances are more than counting noise. Two samples of
counts from the same source are never at distance 0: the counts of every sample
are halved at random, again and again, and the differences of the halves show what
counting alone makes.

Example
  barrow noise --edges harbour/edges.csv --samples harbour/samples.csv --draws 19 --out noise
` + inputHelp + `
  --groups FILE         sample, and any columns, for --replicates

Noise
  --draws N             halvings of every sample; 199 by default
  --dispersion X|auto   variance of the counts over that of plain counts; 1 by
                        default; auto finds it from replicates
  --replicates COLUMN   samples of one label are of one source
  --shift-of DISTANCE   also: how many counts a sample needs for a shift of that
                        distance to stand out
  --calibrate N|auto    pairs solved exactly to scale the distances
  --seed N              other draws and pairs; 1 by default
` + comparisonHelp + runHelp + replayHelp + `
Results
  --out DIR             noise by default:
                          pairs.csv        a,b,distance,floor,excess,p,
                                           false_discovery: floor is the mean of
                                           noise, p how often noise makes as much
                          noise.csv        sample,counts,replicate,upper95
                                           [,needed]: the distance of two samples
                                           like it, mean and 95th percentile
                          run.json         what was run, on what
  --replace             write over results of another run in DIR
`

const shapeHelp = `barrow shape draws a collection of samples by its distances: a map, a tree, groups
around typical samples, and those that lie apart.

Example
  barrow shape --edges harbour/edges.csv --samples harbour/samples.csv --clusters 4 --out shape
` + inputHelp + `
  --distances FILE      instead of these: a matrix.csv

Shape
  --axes N              of the map (classical scaling, Torgerson 1952); 2
  --linkage NAME        of the tree: average (the default), complete, single, ward
  --clusters N          around medoids; 0, the default, takes the number up to ten
                        whose silhouette is best (Rousseeuw 1987)
  --neighbours K        samples apart are those far from their K nearest; 3
  --groups FILE         sample, and any columns, for --ordinary
  --ordinary COL=LABEL  samples with this label are known to be ordinary: others
                        are tested against them (conformal P) and called apart
                        with at most --level (0.05) false among the called
  --method NAME         how distances are made, see barrow help matrix
  --calibrate N|auto    pairs solved exactly for multiscale
  --seed N              another choice of those pairs; 1 by default
` + comparisonHelp + runHelp + replayHelp + `
Results
  --out DIR             shape by default:
                          map.csv          sample,axis1,axis2
                          tree.nwk         the tree, in Newick form
                          clusters.csv     sample,cluster,medoid,silhouette
                          outliers.csv     sample,score,excess,p,false_discovery
                          run.json         what was run, on what
  --replace             write over results of another run in DIR
`

const rankHelp = `barrow rank finds the samples nearest to one, nearest first, and proves that no
other is nearer. Bounds leave most samples aside; the rest are solved exactly.

Example
  barrow rank w1-thu-08 --edges harbour/edges.csv --samples harbour/samples.csv --top 5
` + inputHelp + `
  --top K               how many; 10 by default
  --from DIR            rank among the samples of a results folder of barrow
                        matrix, and use what it has proved; with --samples, more
` + comparisonHelp + runHelp + replayHelp + `
Results
  --out DIR             where they go; without it nothing is written:
                          ranking.csv      rank,sample,distance,lower,upper
                          run.json         what was run, on what
  --replace             write over results of another run in DIR
`

const seriesHelp = `barrow series follows samples in the order of their file, hours or stages: how far
from each to the next and to the first, and where the series breaks.

Example
  barrow series --edges harbour/edges.csv --samples harbour/samples.csv --least 24 --out course
` + inputHelp + `
  --distances FILE      instead of these: a matrix.csv, in the order of the series

Series
  --reference NAME      also the distance of every sample to this one
  --least N             a stretch without a break has N samples or more; 5
  --level P             a break is called at this level, 0.05 by default, by
                        shuffling samples within stretches (Matteson & James 2014)
  --permutations N      199 by default
  --method NAME         how distances are made, see barrow help matrix
  --calibrate N|auto    pairs solved exactly for multiscale
  --seed N              other permutations and pairs; 1 by default
` + comparisonHelp + runHelp + replayHelp + `
Results
  --out DIR             series by default:
                          series.csv       sample,to_next,from_first,
                                           from_reference,path
                          breaks.csv       before,after,statistic,p,p_error
                          run.json         what was run, on what
  --replace             write over results of another run in DIR
`
