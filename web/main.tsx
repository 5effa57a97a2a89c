import 'uplot/dist/uPlot.min.css'
import './styles/ground.css'
import './styles/controls.css'
import './styles/sheet.css'
import './styles/headroom.css'
import './styles/findings.css'
import './styles/strip.css'
import './styles/print.css'
import { render } from 'preact'
import { App } from './app.tsx'

const page = document.getElementById('page')
if (page) render(<App />, page)
