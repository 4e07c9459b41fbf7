import { CustomChart, LineChart, ScatterChart } from 'echarts/charts'
import { AriaComponent, GridComponent, MarkLineComponent, TooltipComponent } from 'echarts/components'
import { init, use, type ComposeOption, type ECharts } from 'echarts/core'
import { LabelLayout } from 'echarts/features'
import { SVGRenderer } from 'echarts/renderers'
import type { CustomSeriesOption, LineSeriesOption, ScatterSeriesOption } from 'echarts/charts'
import type { AriaComponentOption, GridComponentOption, TooltipComponentOption } from 'echarts/components'

// Only these pieces are shipped; a chart that needs another adds it here.
use([AriaComponent, CustomChart, GridComponent, LabelLayout, LineChart, MarkLineComponent, ScatterChart, SVGRenderer, TooltipComponent])

export type ChartOption = ComposeOption<
  AriaComponentOption | CustomSeriesOption | GridComponentOption | LineSeriesOption | ScatterSeriesOption | TooltipComponentOption
>
export type { ECharts }
export const initChart = init
