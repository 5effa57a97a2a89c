import { readFileSync, existsSync, readdirSync } from 'node:fs'
import { deserialize } from 'node:v8'
import { buildTimeline } from './core/timeline/build-timeline.ts'
import { minuteLevels } from './core/findings/minute-levels.ts'
import { laggedCorrelation } from './core/statistics/correlation.ts'
import { evidenceOf } from './core/simulate/simulated.ts'
for (const f of readdirSync('/work/lead/cache').sort()) { const m = /^(.*)-(\d+)\.v8$/.exec(f)!; if (+m[2]! > 1008) continue
  const sim = deserialize(readFileSync('/work/lead/cache/'+f)); const tl = buildTimeline(evidenceOf(sim)); if (!tl.loadCurrent||!tl.leakage) continue
  const a = minuteLevels(tl.leakage), b = minuteLevels(tl.loadCurrent); const amps = new Map(Array.from(b.t).map((t,i)=>[t,b.v[i]!]))
  const out: string[] = []
  for (const apart of [1,5]) for (const sq of [0,1]) { const xs:number[]=[], ys:number[]=[]
    for (let i=apart;i<a.t.length;i++){ const n=a.t[i]!,t=a.t[i-apart]!; if (n-t>3*apart*60000) continue; const A=amps.get(n)??NaN,B=amps.get(t)??NaN; const c=sq?A*A-B*B:A-B; if(!(Math.abs(A-B)>=0.5))continue; xs.push(c); ys.push(sq? a.v[i]!**2-a.v[i-apart]!**2 : a.v[i]!-a.v[i-apart]!) }
    out.push(xs.length<30?'-':laggedCorrelation(xs,ys,0)!.toFixed(3)+'/'+xs.length) }
  console.log(m[1]!.padEnd(24), m[2], out.join('  ')) }
