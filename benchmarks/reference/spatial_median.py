"""Dispersion of groups about their spatial medians, to full accuracy.

    python3 benchmarks/reference/spatial_median.py varespec_bray.csv

takes a table site,group,distances and prints the mean distance from the median
of each of two groups and the F of Anderson 2006. scipy 1.10.1.
"""
import sys
import numpy as np, csv
from scipy.optimize import minimize
rows=list(csv.reader(open(sys.argv[1])))[1:]
g=np.array([r[1] for r in rows]); D=np.array([[float(x) for x in r[2:]] for r in rows]); n=len(g)
J=np.eye(n)-1/n; B=-.5*J@(D**2)@J
w,V=np.linalg.eigh(B)
z2=np.zeros(n)
for s in (1,-1):
    k=s*w>1e-12*abs(w).max(); X=V[:,k]*np.sqrt(s*w[k])
    for c in set(g):
        P=X[g==c]
        f=lambda m: np.linalg.norm(P-m,axis=1).sum()
        def grad(m):
            d=m-P; return (d/np.linalg.norm(d,axis=1)[:,None]).sum(0)
        m=P.mean(0)
        for _ in range(20):
            m=minimize(f,m,jac=grad,method='BFGS',options=dict(gtol=1e-14,maxiter=10000)).x
        print(c,s,'gradient',np.abs(grad(m)).max())
        z2[g==c]+=s*((P-m)**2).sum(1)
z=np.sqrt(abs(z2))
a=z[g=='grazed'];b=z[g!='grazed']
from scipy.stats import f_oneway
print(repr(a.mean()),repr(b.mean()),repr(f_oneway(a,b).statistic))
