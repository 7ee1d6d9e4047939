# The figure of docs/validation.md:  gnuplot -c tests/validation/inference/interval_coverage.gp docs/figures
set terminal svg size 860,760 dynamic background "white" font "DejaVu Sans,11"
set output ARG1."/interval_coverage.svg"
data = ARG1."/interval_coverage.dat"
stats data using 4 nooutput
set multiplot layout 1,2 margins 0.37,0.985,0.1,0.94 spacing 0.03
set key top left Left reverse samplen 0.5 spacing 1.1 opaque height 0.3
set grid y lc rgb "#e4e4e4"
set tics nomirror out
set border 3
set yrange [STATS_records - 0.4:-3.6]
set xlabel "68 % intervals that hold the truth [%]"
set xrange [-2:100]
set arrow 1 from 68,graph 0 to 68,graph 1 nohead lc rgb "#777777" dt 2
set object 1 rectangle from 64,graph 0 to 72,graph 1 fc rgb "#eef3e6" fs solid noborder behind
plot data using 2:0:ytic(1) with points pt 6 ps 0.8 lw 1.5 lc rgb "#b5533c" title "straight line", \
     "" using 4:($0-0.18) with points pt 5 ps 0.45 lc rgb "#1f5f8b" title "likelihood", \
     "" using 6:($0+0.18) with points pt 2 ps 0.6 lw 1.5 lc rgb "#3a7d44" title "posterior"
unset key
set format y ""
set xlabel "95 % intervals that hold the truth [%]"
set arrow 1 from 95,graph 0 to 95,graph 1 nohead lc rgb "#777777" dt 2
set object 1 rectangle from 93,graph 0 to 97,graph 1 fc rgb "#eef3e6" fs solid noborder behind
plot data using 3:0 with points pt 6 ps 0.8 lw 1.5 lc rgb "#b5533c", \
     "" using 5:($0-0.18) with points pt 5 ps 0.45 lc rgb "#1f5f8b", \
     "" using 7:($0+0.18) with points pt 2 ps 0.6 lw 1.5 lc rgb "#3a7d44"
unset multiplot
