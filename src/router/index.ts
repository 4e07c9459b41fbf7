import { createRouter, createWebHistory, type RouteRecordRaw } from 'vue-router'
import { useSessionStore } from '@/stores/session.ts'
import { routeNames as names } from './route-names.ts'

declare module 'vue-router' {
  interface RouteMeta {
    /** First part of the document's title. */
    readonly title?: string
    /** Reachable without signing in. */
    readonly open?: boolean
  }
}

const open = true

const routes: RouteRecordRaw[] = [
  { path: '/', name: names.home, component: () => import('@/views/HomeView.vue'), meta: { title: 'Fanlight' } },
  { path: '/sign-in', name: names.signIn, component: () => import('@/views/SignInView.vue'), meta: { title: 'Sign in', open } },
  { path: '/sign-up', name: names.signUp, component: () => import('@/views/SignUpView.vue'), meta: { title: 'Sign up', open } },
  { path: '/sign-up/confirm', name: names.signUpConfirm, component: () => import('@/views/SignUpConfirmView.vue'), meta: { title: 'Confirm your address', open } },
  { path: '/reset', name: names.resetRequest, component: () => import('@/views/ResetRequestView.vue'), meta: { title: 'Forgotten password', open } },
  { path: '/reset/new', name: names.resetNew, component: () => import('@/views/ResetNewView.vue'), meta: { title: 'New password', open } },
  { path: '/invitation', name: names.invitation, component: () => import('@/views/InvitationView.vue'), meta: { title: 'Invitation', open } },
  { path: '/development/mailbox', name: names.mailbox, component: () => import('@/views/MailboxView.vue'), meta: { title: 'Caught mail', open } },
  { path: '/account', name: names.account, component: () => import('@/views/AccountView.vue'), meta: { title: 'Account' } },
  { path: '/shops/new', name: names.newShop, component: () => import('@/views/NewShopView.vue'), meta: { title: 'New shop' } },
  {
    path: '/shop/:shopId',
    component: () => import('@/components/frame/ShopFrame.vue'),
    children: [
      { path: '', redirect: { name: names.bench } },
      { path: 'bench', name: names.bench, component: () => import('@/views/BenchView.vue'), meta: { title: 'Bench' } },
      { path: 'studies', name: names.studies, component: () => import('@/views/StudyListView.vue'), meta: { title: 'Studies' } },
      { path: 'studies/new', name: names.studyNew, component: () => import('@/views/StudyNewView.vue'), meta: { title: 'New study' } },
      { path: 'studies/:studyId/bench-sheet', name: names.benchSheet, component: () => import('@/views/BenchSheetView.vue'), meta: { title: 'Bench sheet' } },
      { path: 'studies/:studyId/:chapter(plan|film|result)?', name: names.study, component: () => import('@/views/StudyView.vue'), meta: { title: 'Study' } },
      { path: 'printers', name: names.printers, component: () => import('@/views/PrinterListView.vue'), meta: { title: 'Printers' } },
      { path: 'printers/new', name: names.printerNew, component: () => import('@/views/PrinterView.vue'), meta: { title: 'New printer' } },
      { path: 'printers/:printerId', name: names.printer, component: () => import('@/views/PrinterView.vue'), meta: { title: 'Printer' } },
      { path: 'resins', name: names.resins, component: () => import('@/views/ResinListView.vue'), meta: { title: 'Resins' } },
      { path: 'resins/new', name: names.resinNew, component: () => import('@/views/ResinView.vue'), meta: { title: 'New resin' } },
      { path: 'resins/:resinId', name: names.resin, component: () => import('@/views/ResinView.vue'), meta: { title: 'Resin' } },
      { path: 'lots', name: names.lots, component: () => import('@/views/LotListView.vue'), meta: { title: 'Lots' } },
      { path: 'lots/new', name: names.lotNew, component: () => import('@/views/LotView.vue'), meta: { title: 'New lot' } },
      { path: 'lots/:lotId', name: names.lot, component: () => import('@/views/LotView.vue'), meta: { title: 'Lot' } },
      { path: 'pairings', name: names.pairings, component: () => import('@/views/PairingListView.vue'), meta: { title: 'Pairings' } },
      { path: 'pairings/:pairingId', name: names.pairing, component: () => import('@/views/PairingView.vue'), meta: { title: 'Pairing' } },
      { path: 'members', name: names.members, component: () => import('@/views/MembersView.vue'), meta: { title: 'Members' } },
      { path: ':rest(.*)*', component: () => import('@/views/NotFoundView.vue'), meta: { title: 'Not found' } },
    ],
  },
  { path: '/:rest(.*)*', name: names.notFound, component: () => import('@/views/NotFoundView.vue'), meta: { title: 'Not found', open } },
]

export function createAppRouter() {
  const router = createRouter({
    history: createWebHistory(),
    routes,
    scrollBehavior: (to, from, saved) => saved ?? (to.path === from.path ? false : { top: 0 }),
  })

  router.beforeEach(async to => {
    if (to.meta.open === true) return true
    const session = await useSessionStore().load().catch(() => null)
    // Without an answer the page itself says that the server is away.
    if (session === null || session.user !== null) return true
    return { name: names.signIn, query: to.name === names.home ? {} : { then: to.fullPath } }
  })

  router.afterEach((to, from, failure) => {
    if (failure) return
    document.title = to.meta.title === undefined || to.meta.title === 'Fanlight' ? 'Fanlight' : `${to.meta.title} · Fanlight`
    // A reader of the screen hears the new page; filters in the address do not move the focus.
    if (from.matched.length > 0 && to.path !== from.path) {
      requestAnimationFrame(() => document.querySelector<HTMLElement>('main h1')?.focus())
    }
  })

  return router
}
