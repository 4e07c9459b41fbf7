import { CustomChart, LineChart, ScatterChart } from 'echarts/charts'
import { GridComponent, MarkLineComponent, TooltipComponent } from 'echarts/components'
import { init, use, type ComposeOption, type ECharts } from 'echarts/core'
import { SVGRenderer } from 'echarts/renderers'
import type { CustomSeriesOption, LineSeriesOption, ScatterSeriesOption } from 'echarts/charts'
import type { GridComponentOption, TooltipComponentOption } from 'echarts/components'

// Only these pieces are shipped; a chart that needs another adds it here.
use([CustomChart, GridComponent, LineChart, MarkLineComponent, ScatterChart, SVGRenderer, TooltipComponent])

export type ChartOption = ComposeOption<
  CustomSeriesOption | GridComponentOption | LineSeriesOption | ScatterSeriesOption | TooltipComponentOption
>
export type { ECharts }
export const initChart = init
